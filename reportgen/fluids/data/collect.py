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
from pathlib import Path
from typing import Any

import numpy as np
from CoolProp.CoolProp import get_BibTeXKey, get_fluid_param_string

from reportgen.fluids.data import collect_saturation as saturation
from reportgen.fluids.data.collect_bibliography import bibliography, publications
from reportgen.fluids.data.collect_checks import gaps, too_large
from reportgen.fluids.data.collect_melting import REPLACED, STRAIGHT_TO, melting_line
from reportgen.fluids.data.collect_names import FLUIDS, LOWER_LIMIT, Entry, file_of
from reportgen.fluids.data.collect_terms import RESIDUAL, has_constants, ideal_terms, terms_of
from reportgen.fluids.real.helmholtz import Helmholtz
from reportgen.fluids.real.melting import MeltingLine
from reportgen.fluids.real.saturation import SaturationCurves

HERE = Path(__file__).parent


#: Formulas where the order of the elements by convention is not that of Hill.
FORMULAS = {"H3N": "NH3", "ClH": "HCl", "O2S": "SO2", "F6S": "SF6", "C1O1S1": "COS"}
#: Isotopic forms, which the structure code does not tell apart by its formula.
ISOTOPES = {"heavy water": "D2O", "deuterium": "D2", "orthodeuterium": "D2", "paradeuterium": "D2"} | {
    "orthohydrogen": "H2",
    "parahydrogen": "H2",
}


def formula_of(name: str, info: dict[str, Any]) -> str:
    """Chemical formula in one line, such as CO2, from the formula layer of the InChI; empty for mixtures."""
    layers = (info.get("INCHI_STRING") or "").split("/")
    formula = layers[1] if len(layers) > 1 else ""
    return ISOTOPES.get(name) or FORMULAS.get(formula, formula)


def cas_of(info: dict[str, Any]) -> str:
    """CAS registry number; empty where the source has a label of its own in its place."""
    number = info.get("CAS") or ""
    return number if re.fullmatch(r"\d+-\d\d-\d", number) else ""


def ancillary(source: dict[str, Any]) -> Any:
    """Published saturation equation p = p_r exp[(T_r/T) Σ n θ^t], as a function of T [K] giving p [Pa]."""

    def pressure(t: Any) -> Any:
        theta = np.maximum(1 - t / source["T_r"], 0)
        total = sum(n * theta**e for n, e in zip(source["n"], source["t"], strict=True))
        return source["reducing_value"] * np.exp(source["T_r"] / t * total)

    return pressure


def largest_density(equation: Helmholtz, data: dict[str, Any]) -> float:
    """Upper end for density searches [kg/m3]: beyond any state within the limits, while pressure still rises."""
    limits, top = data["limits"], data["critical_point"]
    line = MeltingLine(data["melting_line"]) if data["melting_line"] else None
    curves = SaturationCurves(data["saturation"], top["temperature"])
    liquid = float(curves.at_temperature(np.array([limits["minimum_temperature"]])).liquid_density[0])
    highest = liquid
    for t in np.linspace(limits["minimum_temperature"], limits["maximum_temperature"], 120):
        ceiling = limits["maximum_pressure"]
        if line is not None:
            ceiling = min(ceiling, float(line.pressure(np.array([t]))[0]))
        below = t < top["temperature"]
        start = float(curves.at_temperature(np.array([t])).liquid_density[0]) if below else top["density"]
        grid = np.linspace(start, 3.0 * liquid, 2000)
        p = equation.properties(np.full(2000, t), grid).pressure
        reached = np.flatnonzero(p >= ceiling)
        if reached.size and (np.diff(p[: reached[0]]) > 0).all():
            highest = max(highest, float(grid[reached[0]]))
    return 1.03 * highest


def zero_in_words(equation: Helmholtz, data: dict[str, Any], saturated: Any, *, published: bool) -> str:
    """Where the equation has its zeros, found by evaluating it; ``published`` as by collect_terms.has_constants."""
    origin = ", as published." if published else "; set so, since the constants published are not carried."
    constant = equation.gas_constant

    def liquid(t: float) -> tuple[float, float] | None:
        if not data["lower_end"]["temperature"] <= t < data["critical_point"]["temperature"]:
            return None
        rho = np.array([saturated(t)])
        found = equation.properties(np.array([t]), rho)
        return float(found.enthalpy[0]), float(found.entropy[0])

    triple = data["lower_end"]["temperature"]
    tolerance_h, tolerance_s = 2e-3 * constant * 100, 2e-3 * constant
    for t, h0, s0, words in (
        (
            triple,
            0.0,
            0.0,
            f"s = 0 and h = 0 (to rounding) for the saturated liquid at the {data['lower_end']['is']}, {triple} K",
        ),
        (273.15, 2e5, 1e3, "s = 1 kJ/(kg K) and h = 200 kJ/kg for the saturated liquid at 0 degC"),
        (233.15, 0.0, 0.0, "s = 0 and h = 0 for the saturated liquid at -40 degC"),
        (data["normal_boiling_temperature"] or 0.0, 0.0, 0.0, "s = 0 and h = 0 for the saturated liquid at 101 325 Pa"),
    ):
        found = liquid(t)
        if found and abs(found[0] - h0) < tolerance_h and abs(found[1] - s0) < tolerance_s:
            return f"{words}{origin}"
    t = np.array([298.15])
    rho = 101325.0 / (constant * t)
    delta, tau = rho / equation.reducing_density, equation.reducing_temperature / t
    ideal = equation.ideal(delta, tau)
    h = float((constant * t * (1 + ideal.tau))[0])
    s = float((constant * (ideal.tau - ideal.value))[0])
    mass = data["molar_mass"]
    if abs(h) < tolerance_h and abs(s) < tolerance_s:
        return f"s = 0 and h = 0 for the ideal gas at 298.15 K and 101 325 Pa{origin}"
    constants = "constants of the equation, as published" if published else "constants collected, not those published"
    return (
        f"fixed by the {constants}: the ideal gas at 298.15 K and 101 325 Pa has "
        f"s = {s * mass:.3f} J/(mol K) and h = {h * mass:.2f} J/mol."
    )


def lower_end(entry: Entry, equation_data: dict[str, Any]) -> tuple[float, str]:
    """Lowest temperature [K] of the saturation curves, and what it is.

    The source begins its saturation data above the triple point where the equation does not reach so far.
    """
    triple: float = equation_data["Ttriple"]
    start: float = equation_data["STATES"]["sat_min_liquid"]["T"]
    if start > triple + 0.5:
        return start, LOWER_LIMIT
    return triple, entry.starts_at or "triple point"


def remark_of(entry: Entry, top: float) -> str:
    """Remarks for the reader; ``top`` is the highest temperature [K] of saturation."""
    remarks = [entry.remark] if entry.remark else []
    if entry.join:
        remarks.append(
            f"The published bubble and dew lines leave the stable branches of the equation near the top: from "
            f"{top * (1 - entry.join[0]):.6g} K they are led to the equation's own critical point."
        )
    if entry.source in STRAIGHT_TO:
        remarks.append(
            f"Up to {STRAIGHT_TO[entry.source]:g} K a straight line from the triple point stands for the published "
            "melting line, which misses that point."
        )
    return " ".join(remarks)


def sources_of(entry: Entry, library: dict[str, dict[str, str]], *, melting_line: bool) -> dict[str, Any]:
    """Publications of the equation and of the melting line, where there is one."""
    key = get_BibTeXKey(entry.source, "MELTING_LINE") if melting_line else ""
    if entry.source in REPLACED:
        *_, key = REPLACED[entry.source]
    return {
        "equation": publications(get_BibTeXKey(entry.source, "EOS"), library),
        "melting_line": publications(key, library),
    }


def collect(entry: Entry, library: dict[str, dict[str, str]]) -> dict[str, Any]:
    """Everything of one fluid, ready to be written."""
    source = json.loads(get_fluid_param_string(entry.source, "JSON"))[0]
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
    lowest, lowest_is = lower_end(entry, equation_data)
    stated = source["STATES"]["critical"]
    critical = saturation.critical_point(extended, stated["T"], stated["rhomolar"] * mass)
    start_l = equation_data["STATES"]["sat_min_liquid"]["rhomolar"] * mass
    start_v = equation_data["STATES"]["sat_min_vapor"]["rhomolar"] * mass
    pseudo_pure = bool(equation_data["pseudo_pure"])
    if pseudo_pure:
        lines = source["ANCILLARIES"]
        bubble, dew = ancillary(lines["pL"]), ancillary(lines["pV"])
        given = (lowest, bubble, dew, start_l, start_v)
        if entry.join:
            top = float(critical.temperature)
            pieces = saturation.joined_curves(extended, critical, *given, entry.join)
        else:
            top = lines["pL"]["T_r"]
            pieces = saturation.pseudo_pure_curves(extended, top, *given)
        names: tuple[str, ...] = ("log_pressure", "liquid_density", "log_vapour_density", "log_dew_pressure")
    else:
        top = float(critical.temperature)
        pieces = saturation.pure_curves(extended, critical, lowest, start_l, start_v)
        names = ("log_pressure", "liquid_density", "log_vapour_density")
    log_top, density = (saturation.evaluate_pieces(pieces, row, np.zeros(1))[0] for row in (0, 1))
    apex = {"temperature": top, "pressure": float(np.exp(log_top)), "density": float(density)}
    curves = saturation.as_data(pieces, names)
    bubble_start = saturation.outermost_crossing(pieces, 0, log_top)
    loose = saturation.LOOSE_AT_TOP if pseudo_pure else saturation.LOOSE
    boiling = saturation.inverse(pieces, 0, log_top, bubble_start, loose=loose)
    curves["boiling"] = saturation.as_data(boiling, ("root",))
    if pseudo_pure:
        condensing = saturation.inverse(pieces, 3, log_top, 0.0, loose=loose)
        curves["condensing"] = saturation.as_data(condensing, ("root",))
    lowest_pressure = np.exp(saturation.evaluate_pieces(pieces, 0, np.array([pieces[-1].high]))[0])
    data: dict[str, Any] = {
        "format": "reportgen-fluid/1",
        "name": entry.name,
        "title": entry.title,
        "formula": formula_of(entry.name, info),
        "refrigerant": entry.refrigerant,
        "cas": cas_of(info),
        "aliases": list(entry.aliases),
        "remark": remark_of(entry, top),
        "pseudo_pure": pseudo_pure,
        "molar_mass": mass,
        "molar_gas_constant": equation_data["gas_constant"],
        "acentric_factor": equation_data["acentric"],
        "reducing_temperature": reducing["T"],
        "reducing_molar_density": reducing["rhomolar"],
        "limits": {
            "minimum_temperature": lowest,
            "maximum_temperature": equation_data["T_max"],
            "maximum_pressure": equation_data["p_max"],
            "published_maximum_temperature": entry.claimed,
        },
        "lower_end": {"temperature": lowest, "pressure": float(lowest_pressure), "is": lowest_is},
        "critical_point": apex,
        "stated_critical_temperature": stated["T"],
        "ideal": ideal,
        "residual": residual,
        "melting_line": melting_line(
            entry.source,
            source["ANCILLARIES"].get("melting_line"),
            lowest,
            float(lowest_pressure),
            equation_data["p_max"],
        ),
        "saturation": curves,
    }
    if pseudo_pure:
        data["equation_critical_temperature"] = float(critical.temperature)
        data["join"] = entry.join and list(entry.join)
    data["sources"] = sources_of(entry, library, melting_line=bool(data["melting_line"]))
    add_zero(data, equation, pieces, published=has_constants(equation_data["alpha0"]))
    data["limits"]["maximum_density"] = largest_density(equation, data)
    faults = too_large(gaps(data))
    if faults:
        raise ArithmeticError(f"the curves do not satisfy the equation: {', '.join(faults)} of {gaps(data)}")
    return data


def add_zero(data: dict[str, Any], equation: Helmholtz, pieces: list[saturation.Piece], *, published: bool) -> None:
    """Entropy zero in words, which needs liquid densities from the fitted curves."""
    top = data["critical_point"]["temperature"]

    def root(temperature: float) -> Any:
        return np.array([np.sqrt(np.longdouble(1 - temperature / top))])

    low, high = data["lower_end"]["temperature"], top
    data["normal_boiling_temperature"] = None
    if np.log(101325.0) > np.log(data["lower_end"]["pressure"]):
        for _ in range(80):
            middle = (low + high) / 2
            over = saturation.evaluate_pieces(pieces, 0, root(middle))[0] > np.log(101325.0)
            low, high = (low, middle) if over else (middle, high)
        data["normal_boiling_temperature"] = low
    data["entropy_zero"] = zero_in_words(
        equation,
        data,
        lambda t: float(saturation.evaluate_pieces(pieces, 1, root(t))[0]),
        published=published,
    )


def index_of(folder: Path) -> dict[str, Any]:
    """Names of every fluid with a data file: canonical first, then title, refrigerant number, formula, CAS, aliases."""
    names = {}
    for path in sorted(folder.glob("*.json"), key=lambda path: path.name.casefold()):
        data = json.loads(path.read_text(encoding="utf-8"))
        if data.get("format") == "reportgen-fluid/1":
            others = (data["title"], data["refrigerant"], data["cas"], *data["aliases"])
            names[path.name] = {
                "name": data["name"],
                "others": [other for other in dict.fromkeys(others) if other and other != data["name"]],
                "formula": data["formula"],
            }
    return {"format": "reportgen-fluid-names/1", "files": names}


def write(path: Path, data: dict[str, Any]) -> None:
    """One data file: compact, numbers in the fewest digits that read back the same."""
    text = json.dumps(data, separators=(",", ":"), ensure_ascii=False)
    path.write_text(text + "\n", encoding="utf-8", newline="\n")


def main(chosen: list[str]) -> None:
    """Write the data files of the chosen fluids, all when none is named, and the index of names."""
    library = bibliography()
    for entry in FLUIDS:
        if chosen and entry.name not in chosen:
            continue
        try:
            data = collect(entry, library)
        except (ArithmeticError, KeyError, ValueError, IndexError, StopIteration) as error:
            print(f"{entry.name}: FAILED, {type(error).__name__}: {error}", flush=True)
            continue
        path = HERE / file_of(entry.name)
        write(path, data)
        intervals = len(data["saturation"]["edges"]) - 1
        critical = data["critical_point"]
        print(
            f"{entry.name}: {path.stat().st_size / 1e3:.1f} kB, {intervals} intervals, "
            f"Tc {critical['temperature']:.9g} K, pc {critical['pressure']:.9g} Pa; {data['entropy_zero']}",
            flush=True,
        )
    write(HERE / "names.json", index_of(HERE))


if __name__ == "__main__":
    main(sys.argv[1:])
