"""Collects the published coefficients of real-fluid equations into data files, one a fluid (run by a maintainer).

    python -m reportgen.fluids.data.collect [NAME ...]

Reads the coefficients and bibliography that the CoolProp wheel (MIT licence) carries, names the publication of each,
and adds what is computed here from the equation alone: true critical point, saturation curves, entropy zero in words.
Nothing of that library's own fits, code or reference-state choices is carried over. See NOTICE.md.
"""

from __future__ import annotations

import json
import re
import sys
import unicodedata
from pathlib import Path
from typing import Any

import CoolProp
import numpy as np
from CoolProp.CoolProp import get_BibTeXKey, get_fluid_param_string

from reportgen.fluids.data import collect_saturation as saturation
from reportgen.fluids.real.helmholtz import Helmholtz

#: What to collect: name in the source, name here (also the file), title. More fluids are more lines.
FLUIDS = (
    ("Water", "water", "Water"),
    ("CarbonDioxide", "carbon dioxide", "Carbon dioxide"),
    ("Nitrogen", "nitrogen", "Nitrogen"),
    ("Oxygen", "oxygen", "Oxygen"),
    ("Argon", "argon", "Argon"),
    ("Methane", "methane", "Methane"),
    ("n-Propane", "propane", "Propane"),
    ("Ammonia", "ammonia", "Ammonia"),
    ("R134a", "R134a", "R134a"),
    ("Air", "air", "Air"),
)

#: Highest temperature [K] the publication claims, from its title (water: IAPWS R6-95(2018), section 4). The source's
#: own limit is often higher; between the two the equation is extrapolated, which the limits say.
PUBLISHED_MAXIMUM = {
    "air": 2000.0,
    "ammonia": 725.0,
    "argon": 700.0,
    "carbon dioxide": 1100.0,
    "methane": 625.0,
    "nitrogen": 1000.0,
    "oxygen": 300.0,
    "propane": 650.0,
    "R134a": 455.0,
    "water": 1273.0,
}

#: Entries of the bibliography that are incomplete or misprinted in the source.
CORRECTIONS = {
    "Gao-JPCRD-2020": {
        "author": "K. Gao and J. Wu and I. H. Bell and A. H. Harvey and E. W. Lemmon",
        "year": "2023",
        "title": "A Reference Equation of State with an Associating Term for the Thermodynamic Properties of Ammonia",
        "volume": "52",
        "pages": "013102",
        "doi": "10.1063/5.0128269",
    },
    "TillnerRoth-JPCRD-1994": {
        "title": "An International Standard Formulation for the Thermodynamic Properties of 1,1,1,2-Tetrafluoroethane "
        "(HFC-134a) for Temperatures from 170 K to 455 K and Pressures up to 70 MPa"
    },
    "IAPWS-Melting-2011": {"institution": "IAPWS R14-08(2011)"},
}

#: Kinds of terms: name in the source -> name here (terms.py) and the columns carried.
RESIDUAL = {
    "Power": ("power", "ndtl"),
    "Exponential": ("exponential", "ndtgl"),
    "Gaussian": ("gaussian", ("n", "d", "t", "eta", "epsilon", "beta", "gamma")),
    "GaoB": ("gao-b", ("n", "d", "t", "eta", "epsilon", "beta", "gamma", "b")),
    "Lemmon2005": ("lemmon-2005", "ndtlm"),
    "NonAnalytic": ("non-analytic", ("n", "a", "b", "beta", "A", "B", "C", "D")),
}
IDEAL = {
    "Lead": ("lead", ("a1", "a2")),
    "LogTau": ("log-tau", "a"),
    "Power": ("power", "nt"),
    "PlanckEinstein": ("planck-einstein", "nt"),
    "PlanckEinsteinFunctionT": ("planck-einstein-temperature", "nv"),
    "PlanckEinsteinGeneralized": ("planck-einstein-generalized", "ntcd"),
    "CP0Constant": ("heat-capacity-constant", ("cp_over_R", "T0")),
    "CP0PolyT": ("heat-capacity-polynomial", ("c", "t", "T0")),
}
OFFSET = "IdealGasHelmholtzEnthalpyEntropyOffset"
MELTING = {
    "Simon": ("simon", ("a", "c")),
    "polynomial_in_Tr": ("polynomial-in-ratio", ("a", "t")),
    "polynomial_in_Theta": ("polynomial-in-rise", ("a", "t")),
}

HERE = Path(__file__).parent


def terms_of(source: list[dict[str, Any]], known: dict[str, Any], prefix: str) -> list[dict[str, Any]]:
    """Terms under our names; stops at a kind that is not carried."""
    result = []
    for term in source:
        kind, columns = known[term["type"].removeprefix(prefix)]
        renamed = {"cp_over_R": "c"}
        result.append({"kind": kind} | {renamed.get(name, name): term[name] for name in columns})
    return result


def ideal_terms(source: list[dict[str, Any]]) -> list[dict[str, Any]]:
    """Ideal part with the publication's own zero.

    The source adds offsets to reach its default zero; they are left out, except where the integration constants
    published are not carried (both constants of the lead term zero, no other term holding them).
    """
    plain = [term for term in source if term["type"] != OFFSET]
    constants = any(
        (term["type"].endswith("Lead") and (term["a1"] or term["a2"]))
        or (term["type"].endswith("HelmholtzPower") and {0, 1} & set(term["t"]))
        or "CP0" in term["type"]
        for term in plain
    )
    if not constants:
        plain += [term | {"type": "IdealGasHelmholtzLead"} for term in source if term["type"] == OFFSET]
    return terms_of(plain, IDEAL, "IdealGasHelmholtz")


def plain_text(text: str) -> str:
    """BibTeX text without braces and accents written as commands."""
    text = text.replace(r"\ss", "ß").replace("~", " ").replace(r"\&", "&")
    accents = {'"': "\u0308", "'": "\u0301", "`": "\u0300", "^": "\u0302", "c": "\u0327", "v": "\u030c"}

    def compose(match: re.Match[str]) -> str:
        letter = {r"\i": "i", r"\o": "ø"}.get(match[2], match[2])
        return unicodedata.normalize("NFC", letter + accents[match[1]])

    text = re.sub(r"\\([\"'`^]|[cv](?=[{ ]))\s*\{?(\\i|[A-Za-z])\}?", compose, text)
    text = text.replace(r"\o", "ø").replace(r"\l", "ł")
    return re.sub(r"\s+", " ", re.sub(r"[{}]|\\", "", text)).strip()


def bibliography() -> dict[str, dict[str, str]]:
    """Entries of the .bib file in the wheel: key -> fields in lower case."""
    text = (Path(CoolProp.__file__).parent / "CoolPropBibTeXLibrary.bib").read_text(encoding="utf-8", errors="replace")
    entries = {}
    for match in re.finditer(r"@\w+\{([^,\s]+),(.*?)\n\}", text, flags=re.DOTALL):
        fields = re.findall(r"^\s*(\w+)\s*=\s*(\{.*?\}|\".*?\"|\d+),?\s*$", match[2], flags=re.MULTILINE)
        entries[match[1]] = {name.lower(): plain_text(value.strip('"')) for name, value in fields}
    return entries


def publications(keys: str, library: dict[str, dict[str, str]]) -> list[dict[str, str]]:
    """Authors, year, title, where published and DOI of each comma-joined key."""
    found = []
    for key in filter(None, (part.strip() for part in keys.split(","))):
        entry = library[key] | CORRECTIONS.get(key, {})
        where = entry.get("journal") or entry.get("institution") or entry.get("publisher") or entry.get("school") or ""
        if entry.get("volume"):
            where += f" {entry['volume']}"
        if entry.get("pages"):
            where += f", {entry['pages'].replace('--', '-')}"
        authors = entry.get("author", "")
        found.append(
            {
                "authors": authors.replace(" and ", "; "),
                "year": entry.get("year", ""),
                "title": entry.get("title", ""),
                "published_in": where,
                "doi": entry.get("doi", ""),
            }
        )
    return found


def formula_of(info: dict[str, Any]) -> str:
    """Chemical formula in one line, such as CO2; empty for mixtures."""
    return re.sub(r"[_{}]", "", re.sub(r"_\{1\}", "", info.get("FORMULA", "")))


def melting_line(source: dict[str, Any] | None, triple: float) -> dict[str, Any] | None:
    """Melting line from the triple point upwards, in ascending temperature."""
    if source is None:
        return None
    form, columns = MELTING[source["type"]]
    parts = [
        {
            "minimum_temperature": min(part["T_min"], part["T_max"]),
            "maximum_temperature": max(part["T_min"], part["T_max"]),
            "temperature": part["T_0"],
            "pressure": part["p_0"],
        }
        | {name: part[name] for name in columns}
        for part in source["parts"]
        if max(part["T_min"], part["T_max"]) > triple
    ]
    parts.sort(key=lambda part: part["minimum_temperature"])
    return {"form": form, "parts": parts}


def ancillary(source: dict[str, Any]) -> Any:
    """Published saturation equation p = p_r exp[(T_r/T) Σ n θ^t], as a function of T [K] giving p [Pa]."""

    def pressure(t: Any) -> Any:
        theta = np.maximum(1 - t / source["T_r"], 0)
        total = sum(n * theta**e for n, e in zip(source["n"], source["t"], strict=True))
        return source["reducing_value"] * np.exp(source["T_r"] / t * total)

    return pressure


def largest_density(equation: Helmholtz, data: dict[str, Any], liquid: float) -> float:
    """Upper end for density searches [kg/m3]: beyond any state within the limits, while pressure still rises."""
    from reportgen.fluids.real.melting import MeltingLine

    limits = data["limits"]
    line = MeltingLine(data["melting_line"]) if data["melting_line"] else None
    highest = 0.0
    for t in np.linspace(limits["minimum_temperature"], limits["maximum_temperature"], 120):
        ceiling = limits["maximum_pressure"]
        if line is not None:
            ceiling = min(ceiling, float(line.pressure(np.array([t]))[0]))
        grid = np.linspace(0.9 * liquid, 3.0 * liquid, 2000)
        p = equation.properties(np.full(2000, t), grid).pressure
        reached = np.flatnonzero(p >= ceiling)
        if reached.size and (np.diff(p[: reached[0]]) > 0).all() and reached[0] > 0:
            highest = max(highest, float(grid[reached[0]]))
    return 1.03 * highest


def zero_in_words(equation: Helmholtz, data: dict[str, Any], saturated: Any) -> str:
    """Where the published equation has its zeros, found by evaluating it."""
    constant = equation.gas_constant

    def liquid(t: float) -> tuple[float, float] | None:
        if not data["triple_point"]["temperature"] <= t < data["critical_point"]["temperature"]:
            return None
        rho = np.array([saturated(t)])
        found = equation.properties(np.array([t]), rho)
        return float(found.enthalpy[0]), float(found.entropy[0])

    triple = data["triple_point"]["temperature"]
    tolerance_h, tolerance_s = 2e-3 * constant * 100, 2e-3 * constant
    for t, h0, s0, words in (
        (triple, 0.0, 0.0, f"s = 0 and h = 0 (to rounding) for the saturated liquid at the triple point, {triple} K"),
        (273.15, 2e5, 1e3, "s = 1 kJ/(kg K) and h = 200 kJ/kg for the saturated liquid at 0 degC"),
        (233.15, 0.0, 0.0, "s = 0 and h = 0 for the saturated liquid at -40 degC"),
        (data["normal_boiling_temperature"] or 0.0, 0.0, 0.0, "s = 0 and h = 0 for the saturated liquid at 101 325 Pa"),
    ):
        found = liquid(t)
        if found and abs(found[0] - h0) < tolerance_h and abs(found[1] - s0) < tolerance_s:
            return f"{words}, as published."
    t = np.array([298.15])
    rho = 101325.0 / (constant * t)
    delta, tau = rho / equation.reducing_density, equation.reducing_temperature / t
    ideal = equation.ideal(delta, tau)
    h = float((constant * t * (1 + ideal.tau))[0])
    s = float((constant * (ideal.tau - ideal.value))[0])
    mass = data["molar_mass"]
    if abs(h) < tolerance_h and abs(s) < tolerance_s:
        return "s = 0 and h = 0 for the ideal gas at 298.15 K and 101 325 Pa, as published."
    return (
        f"fixed by the constants of the equation, as published: the ideal gas at 298.15 K and 101 325 Pa has "
        f"s = {s * mass:.3f} J/(mol K) and h = {h * mass:.2f} J/mol."
    )


def collect(source_name: str, name: str, title: str, library: dict[str, dict[str, str]]) -> dict[str, Any]:
    """Everything of one fluid, ready to be written."""
    source = json.loads(get_fluid_param_string(source_name, "JSON"))[0]
    equation_data, info = source["EOS"][0], source["INFO"]
    mass, reducing = equation_data["molar_mass"], equation_data["STATES"]["reducing"]
    ideal = ideal_terms(equation_data["alpha0"])
    residual = terms_of(equation_data["alphar"], RESIDUAL, "ResidualHelmholtz")
    constants = {
        "reducing_temperature": reducing["T"],
        "reducing_density": reducing["rhomolar"] * mass,
        "gas_constant": equation_data["gas_constant"] / mass,
    }
    equation = Helmholtz(ideal, residual, **constants)
    extended = Helmholtz(ideal, residual, **constants, dtype=np.longdouble)
    triple: float = equation_data["Ttriple"]
    stated = source["STATES"]["critical"]
    critical = saturation.critical_point(extended, stated["T"], stated["rhomolar"] * mass)
    start_l = equation_data["STATES"]["sat_min_liquid"]["rhomolar"] * mass
    start_v = equation_data["STATES"]["sat_min_vapor"]["rhomolar"] * mass
    pseudo_pure = bool(equation_data["pseudo_pure"])
    if pseudo_pure:
        lines = source["ANCILLARIES"]
        top = lines["pL"]["T_r"]
        bubble, dew = ancillary(lines["pL"]), ancillary(lines["pV"])
        pieces = saturation.pseudo_pure_curves(
            extended, top, triple, bubble, dew, start_l, start_v, critical=critical.temperature
        )
        names: tuple[str, ...] = ("log_pressure", "liquid_density", "log_vapour_density", "log_dew_pressure")
        highest = next(s for key, s in equation_data["STATES"].items() if key == "temperature_max_sat")
        apex = {"temperature": highest["T"], "pressure": highest["p"], "density": highest["rhomolar"] * mass}
    else:
        pieces = saturation.pure_curves(extended, critical, triple, start_l, start_v)
        names = ("log_pressure", "liquid_density", "log_vapour_density")
        apex = {
            "temperature": float(critical.temperature),
            "pressure": float(critical.pressure),
            "density": float(critical.density),
        }
    log_top = saturation.evaluate_pieces(pieces, 0, np.zeros(1))[0]
    curves = saturation.as_data(pieces, names)
    bubble_start = saturation.outermost_crossing(pieces, 0, log_top)
    curves["boiling"] = saturation.as_data(saturation.inverse(pieces, 0, log_top, bubble_start), ("root",))
    if pseudo_pure:
        curves["condensing"] = saturation.as_data(saturation.inverse(pieces, 3, log_top, 0.0), ("root",))
    at_triple = saturation.evaluate_pieces(pieces, 0, np.array([pieces[-1].high]))[0]
    data: dict[str, Any] = {
        "format": "reportgen-fluid/1",
        "name": name,
        "title": title,
        "formula": formula_of(info),
        "cas": info.get("CAS", ""),
        "aliases": sorted({*info["ALIASES"], source_name}),
        "pseudo_pure": pseudo_pure,
        "molar_mass": mass,
        "molar_gas_constant": equation_data["gas_constant"],
        "acentric_factor": equation_data["acentric"],
        "reducing_temperature": reducing["T"],
        "reducing_molar_density": reducing["rhomolar"],
        "limits": {
            "minimum_temperature": triple,
            "maximum_temperature": equation_data["T_max"],
            "maximum_pressure": equation_data["p_max"],
            "published_maximum_temperature": PUBLISHED_MAXIMUM.get(name),
        },
        "triple_point": {"temperature": triple, "pressure": float(np.exp(at_triple))},
        "critical_point": apex,
        "stated_critical_temperature": stated["T"],
        "ideal": ideal,
        "residual": residual,
        "melting_line": melting_line(source["ANCILLARIES"].get("melting_line"), triple),
        "saturation": curves,
    }
    if pseudo_pure:
        data["equation_critical_temperature"] = float(critical.temperature)
    melting_key = get_BibTeXKey(source_name, "MELTING_LINE") if data["melting_line"] else ""
    data["sources"] = {
        "equation": publications(get_BibTeXKey(source_name, "EOS"), library),
        "melting_line": publications(melting_key, library),
    }
    add_zero(data, equation, pieces)
    data["limits"]["maximum_density"] = largest_density(equation, data, start_l)
    return data


def add_zero(data: dict[str, Any], equation: Helmholtz, pieces: list[saturation.Piece]) -> None:
    """Entropy zero in words, which needs liquid densities from the fitted curves."""
    top = data["critical_point"]["temperature"]

    def root(temperature: float) -> Any:
        return np.array([np.sqrt(np.longdouble(1 - temperature / top))])

    low, high = data["triple_point"]["temperature"], top
    data["normal_boiling_temperature"] = None
    if np.log(101325.0) > np.log(data["triple_point"]["pressure"]):
        for _ in range(80):
            middle = (low + high) / 2
            over = saturation.evaluate_pieces(pieces, 0, root(middle))[0] > np.log(101325.0)
            low, high = (low, middle) if over else (middle, high)
        data["normal_boiling_temperature"] = low
    data["entropy_zero"] = zero_in_words(
        equation, data, lambda t: float(saturation.evaluate_pieces(pieces, 1, root(t))[0])
    )


def main(chosen: list[str]) -> None:
    """Write the data files of the chosen fluids, all when none is named."""
    library = bibliography()
    for source_name, name, title in FLUIDS:
        if chosen and name not in chosen:
            continue
        data = collect(source_name, name, title, library)
        path = HERE / f"{name.replace(' ', '-')}.json"
        text = json.dumps(data, separators=(",", ":"), ensure_ascii=False)
        path.write_text(text + "\n", encoding="utf-8", newline="\n")
        intervals = len(data["saturation"]["edges"]) - 1
        critical = data["critical_point"]
        print(
            f"{name}: {path.stat().st_size / 1e3:.1f} kB, {intervals} intervals, Tc {critical['temperature']:.9g} K, "
            f"pc {critical['pressure']:.9g} Pa; {data['entropy_zero']}"
        )


if __name__ == "__main__":
    main(sys.argv[1:])
