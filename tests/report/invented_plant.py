"""The invented plant behind the tests of the report: values, steps and figures as an evaluation would give them.

Plant, tags, limits and uncertainties are invented; properties come from CoolProp. Uncertainties of results are made
up in a fixed proportion: these tests look at what a page shows, not at what evaluation finds.
"""

from __future__ import annotations

from typing import Any

import numpy
from CoolProp.CoolProp import PropsSI

from reportgen.names import DIMENSIONS, NAMES, symbol_of

AMBIENT = 288.15
ATMOSPHERE = 101300.0
FLOW = 5.2 / 3.6


def number_text(value: float, scale: float, unit: str, digits: int = 6) -> str:
    """LaTeX of a number with its unit."""
    return rf"{value / scale:.{digits}g}\,\mathrm{{{unit}}}"


def entropy_text(value: float) -> str:
    return number_text(value, 1e3, r"kJ\,kg^{-1}\,K^{-1}")


def enthalpy_text(value: float) -> str:
    return number_text(value, 1e3, r"kJ\,kg^{-1}")


class Builder:
    """Collects values, relations and inputs of the invented plant."""

    def __init__(self) -> None:
        self.values: dict[str, Any] = {}
        self.relations: dict[str, Any] = {}
        self.order: list[str] = []
        self.inputs: dict[str, Any] = {}

    def input(self, path: str, text: str, value: float, standard: float | None = None, **more: Any) -> None:
        dimension = NAMES[path.rsplit(".", 1)[-1]].dimension
        self.inputs[path] = {
            "text": text,
            "value": value,
            "unit": DIMENSIONS[dimension],
            "dimension": dimension,
            "standard_uncertainty": standard,
            "expanded_uncertainty": None if standard is None else 2 * standard,
            "coverage_factor": 2.0,
            "distribution": "normal",
            "evaluation": "B",
            "degrees_of_freedom": None,
            "source": more.get("source"),
            "supplied_by": more.get("supplied_by"),
            "status": more.get("status"),
            "applies_to": more.get("applies_to", [path]),
            "file": "calculation.toml",
            "line": 20 + len(self.inputs),
        }
        for target in self.inputs[path]["applies_to"]:
            self.add(target, value, [path] if target != path else [], None, standard)

    def add(
        self, path: str, value: float | str | None, sources: list[str], relation: str | None, standard: float | None
    ) -> None:
        name = path.rsplit(".", 1)[-1]
        dimension = NAMES[name].dimension if name in NAMES else "ratio"
        self.values[path] = {
            "value": value,
            "unit": "" if name == "phase" else DIMENSIONS[dimension],
            "dimension": "" if name == "phase" else dimension,
            "symbol": symbol_of(path),
            "standard_uncertainty": standard,
            "from": sources,
            "relation": relation,
        }

    def step(
        self,
        key: str,
        owner: str,
        sentence: str,
        basis: str,
        results: dict[str, float | str | None],
        uses: list[str],
        lines: list[list[str]],
        share: float | None = 0.002,
    ) -> None:
        for path, value in results.items():
            standard = abs(value) * share if share and isinstance(value, float) else None
            self.add(path, value, uses, key, standard)
        self.relations[key] = {
            "owner": owner,
            "equipment": owner.split(".", 1)[1] if owner.startswith("equipment.") else None,
            "name": key,
            "sentence": sentence,
            "basis": basis,
            "solves": list(results),
            "uses": uses,
            "latex_symbols": " = ".join(lines[0][:2]),
            "latex_numbers": " = ".join([lines[0][0], *lines[0][2:]]),
            "latex_lines": lines,
        }
        self.order.append(key)


def state_step(build: Builder, state: str, given: tuple[str, str], shown: str, share: float) -> None:
    """All properties of a state from two known ones."""
    keys = {"pressure": "P", "temperature": "T", "specific_enthalpy": "Hmass", "specific_entropy": "Smass"}
    known = [build.values[f"states.{state}.{name}"]["value"] for name in given]
    outputs = {**keys, "density": "Dmass", "isobaric_heat_capacity": "Cpmass"}
    found = {
        f"states.{state}.{name}": PropsSI(code, keys[given[0]], known[0], keys[given[1]], known[1], "Water")
        for name, code in outputs.items()
        if name not in given
    }
    entropy, enthalpy = found.get(f"states.{state}.specific_entropy"), found.get(f"states.{state}.specific_enthalpy")
    letters = {"pressure": "p", "temperature": "T", "specific_enthalpy": "h"}
    texts = {
        "pressure": number_text(known[0], 1e5, "bar"),
        "temperature": rf"{known[1]:.6g}\,\mathrm{{K}}",
        "specific_enthalpy": enthalpy_text(known[1]),
    }
    arguments = ", ".join(letters[name] + rf"_{{\mathrm{{{state}}}}}" for name in given)
    numbers = r",\; ".join(texts[name] for name in given)
    lines = []
    if entropy is not None:
        lines.append(
            [
                rf"s_{{\mathrm{{{state}}}}}",
                rf"s\left({arguments}\right)",
                rf"s\left({numbers}\right)",
                entropy_text(entropy),
            ]
        )
    if enthalpy is not None:
        lines.append(
            [
                rf"h_{{\mathrm{{{state}}}}}",
                rf"h\left({arguments}\right)",
                rf"h\left({numbers}\right)",
                enthalpy_text(enthalpy),
            ]
        )
    uses = [f"states.{state}.{name}" for name in given] + ["fluids.steam"]
    build.step(f"state.{state}", f"states.{state}", shown, "IAPWS R6-95(2018)", {**found}, uses, lines, share)
    build.add(f"states.{state}.phase", "vapour", uses, f"state.{state}", None)
    exergy = None
    dead = {code: PropsSI(code, "P", ATMOSPHERE, "T", AMBIENT, "Water") for code in ("Hmass", "Smass")}
    here = {name: build.values[f"states.{state}.{name}"]["value"] for name in ("specific_enthalpy", "specific_entropy")}
    exergy = here["specific_enthalpy"] - dead["Hmass"] - AMBIENT * (here["specific_entropy"] - dead["Smass"])
    build.add(f"states.{state}.specific_exergy", exergy, uses, f"state.{state}", exergy * share)


def piece(build: Builder, tag: str, inlet: str, outlet: str, power: float) -> None:
    """Entropy balance and lost work of one piece."""
    s_in = build.values[f"states.{inlet}.specific_entropy"]["value"]
    s_out = build.values[f"states.{outlet}.specific_entropy"]["value"]
    generation = FLOW * (s_out - s_in)
    owner = f"equipment.{tag}"
    sub = rf"\mathrm{{{tag}}}"
    build.step(
        f"{owner}.entropy",
        owner,
        f"Entropy generated in {tag} is what leaves less what enters, with the flows and with heat.",
        "second law, open system, steady flow",
        {f"{owner}.entropy_generation": generation},
        [
            f"states.{inlet}.specific_entropy",
            f"states.{outlet}.specific_entropy",
            f"states.{inlet}.mass_flow",
            f"{owner}.heat",
        ],
        [
            [
                rf"\dot S_{{\mathrm{{gen}},{sub}}}",
                rf"\dot m_{{\mathrm{{{inlet}}}}} \left(s_{{\mathrm{{{outlet}}}}} - s_{{\mathrm{{{inlet}}}}}\right)"
                rf" - \sum_{{j}} \frac{{\dot Q_{{j}}}}{{T_{{j}}}}",
                rf"{FLOW:.5g}\,\mathrm{{kg\,s^{{-1}}}} \left({s_out / 1e3:.6g} - {s_in / 1e3:.6g}\right)"
                r"\,\mathrm{kJ\,kg^{-1}\,K^{-1}} - 0\,\mathrm{kW\,K^{-1}}",
                rf"{generation / 1e3:.4g}\,\mathrm{{kW\,K^{{-1}}}}",
            ]
        ],
        0.0105,
    )
    build.step(
        f"{owner}.lost_work",
        owner,
        f"Work forgone in {tag} at the temperature of the surroundings.",
        "theorem of Gouy and Stodola",
        {f"{owner}.lost_work": AMBIENT * generation},
        ["surroundings.temperature", f"{owner}.entropy_generation"],
        [
            [
                rf"\dot W_{{\mathrm{{lost}},{sub}}}",
                rf"T_{{0}}\,\dot S_{{\mathrm{{gen}},{sub}}}",
                rf"{AMBIENT:.5g}\,\mathrm{{K}} \cdot {generation / 1e3:.4g}\,\mathrm{{kW\,K^{{-1}}}}",
                rf"{AMBIENT * generation / 1e3:.4g}\,\mathrm{{kW}}",
            ]
        ],
        0.0105,
    )
    build.step(
        f"{owner}.energy_check",
        owner,
        f"What is left of the energy balance of {tag}.",
        "first law, open system",
        {f"{owner}.energy_imbalance": 2.3e-9},
        [f"states.{inlet}.specific_enthalpy", f"states.{outlet}.specific_enthalpy", f"{owner}.heat"],
        [
            [
                rf"\delta\dot E_{{{sub}}}",
                rf"\dot Q_{{{sub}}} - \dot W_{{{sub}}} + \dot m_{{\mathrm{{{inlet}}}}} h_{{\mathrm{{{inlet}}}}}"
                rf" - \dot m_{{\mathrm{{{outlet}}}}} h_{{\mathrm{{{outlet}}}}}",
                rf"0\,\mathrm{{kW}} - {power / 1e3:.4g}\,\mathrm{{kW}} + 4643.5\,\mathrm{{kW}} - 4279.9\,\mathrm{{kW}}",
                r"2.3 \times 10^{-12}\,\mathrm{kW}",
            ]
        ],
        None,
    )


def figure_data(build: Builder) -> list[dict[str, Any]]:
    """Dome, isobars and paths for the T-s figure, and the two bar figures."""
    critical = PropsSI("Tcrit", "Water")
    temperature = numpy.concatenate([numpy.linspace(273.16, critical - 3, 60), critical - numpy.geomspace(3, 1e-3, 25)])
    liquid = [PropsSI("Smass", "T", t, "Q", 0, "Water") for t in temperature]
    vapour = [PropsSI("Smass", "T", t, "Q", 1, "Water") for t in temperature]
    top = 4412.0
    value = {path: entry["value"] for path, entry in build.values.items()}
    isobars = []
    for pressure in (value["states.1.pressure"], value["states.2.pressure"]):
        grid = numpy.linspace(300.0, 5200.0 if pressure > 1e7 else 7800.0, 120)
        points = [PropsSI("T", "P", pressure, "Smass", s, "Water") for s in grid]
        isobars.append({"pressure": pressure, "entropy": list(grid), "temperature": points})
    paths = []
    for tag, outlet in (("PRV-3", "2"), ("TG-2", "3")):
        pressures = numpy.linspace(value["states.1.pressure"], value[f"states.{outlet}.pressure"], 40)
        enthalpies = numpy.linspace(
            value["states.1.specific_enthalpy"], value[f"states.{outlet}.specific_enthalpy"], 40
        )
        pairs = list(zip(pressures, enthalpies, strict=True))
        paths.append(
            {
                "equipment": tag,
                "role": "main",
                "entropy": [PropsSI("Smass", "P", p, "Hmass", h, "Water") for p, h in pairs],
                "temperature": [PropsSI("T", "P", p, "Hmass", h, "Water") for p, h in pairs],
            }
        )
    points = [
        {
            "state": state,
            "entropy": value[f"states.{state}.specific_entropy"],
            "temperature": value[f"states.{state}.temperature"],
            "label": state,
        }
        for state in ("1", "2", "3")
    ]
    bars = [
        {
            "label": tag,
            "path": f"equipment.{tag}.lost_work",
            "value": value[f"equipment.{tag}.lost_work"],
            "expanded_uncertainty": 0.021 * value[f"equipment.{tag}.lost_work"],
            "train": train,
        }
        for tag, train in (("PRV-3", "valve"), ("TG-2", "turbine"))
    ]
    return [
        {
            "id": "temperature-entropy.steam",
            "kind": "temperature-entropy",
            "fluid": "steam",
            "title": "Temperature and specific entropy, steam",
            "caption": "The two expansions, evaluated along the path. Saturation line and isobars from IAPWS R6-95.",
            "dome": {
                "entropy": [*liquid, top, *reversed(vapour)],
                "temperature": [*temperature, critical, *reversed(temperature)],
            },
            "isobars": isobars,
            "paths": paths,
            "points": points,
        },
        {
            "id": "lost-work",
            "kind": "lost-work-bars",
            "title": "Work forgone, piece by piece",
            "caption": "Work forgone at the temperature of the surroundings, with expanded uncertainty.",
            "bars": bars,
        },
    ]


def solved() -> Builder:
    """The plant with all its inputs, values and steps."""
    build = Builder()
    build.input("surroundings.temperature", "15 degC", AMBIENT)
    build.input("surroundings.pressure", "1.013 bar", ATMOSPHERE)
    build.input(
        "states.1.pressure",
        "39.0 bar(g) ± 0.3 bar",
        39e5 + ATMOSPHERE,
        15000.0,
        source="PT-301, calibration certificate 2026-0117",
        supplied_by="Instruments",
    )
    build.input(
        "states.1.temperature",
        "400 degC ± 1.5 K",
        673.15,
        0.866,
        source="TT-301, calibrated 2026-01",
        status="measured",
    )
    build.input(
        "states.1.mass_flow",
        "5.2 t/h ± 2 %",
        FLOW,
        FLOW * 0.01,
        source="FT-301",
        applies_to=["states.1.mass_flow", "states.2.mass_flow", "states.3.mass_flow"],
    )
    build.input(
        "states.2.pressure",
        "9.0 bar(g)",
        9e5 + ATMOSPHERE,
        applies_to=["states.2.pressure", "states.3.pressure"],
    )
    build.input("equipment.TG-2.isentropic_efficiency", "0.72 ± 0.02", 0.72, 0.01, source="Supplier's offer 4417")
    state_step(build, "1", ("pressure", "temperature"), "Steam at the header, from pressure and temperature.", 0.001)
    for tag in ("PRV-3", "TG-2"):
        build.add(f"equipment.{tag}.heat", 0.0, [], None, None)
    build.step(
        "equipment.PRV-3.energy",
        "equipment.PRV-3",
        "Valve PRV-3 exchanges neither heat nor work; the enthalpy is kept.",
        "first law, steady flow",
        {"states.2.specific_enthalpy": build.values["states.1.specific_enthalpy"]["value"]},
        ["states.1.specific_enthalpy", "equipment.PRV-3.heat"],
        [
            [
                r"h_{\mathrm{2}}",
                r"h_{\mathrm{1}}",
                enthalpy_text(build.values["states.1.specific_enthalpy"]["value"]),
                enthalpy_text(build.values["states.1.specific_enthalpy"]["value"]),
            ]
        ],
    )
    state_step(
        build,
        "2",
        ("pressure", "specific_enthalpy"),
        "Temperature and entropy behind the valve follow from pressure and enthalpy.",
        0.001,
    )
    p2, s1 = build.values["states.2.pressure"]["value"], build.values["states.1.specific_entropy"]["value"]
    h1 = build.values["states.1.specific_enthalpy"]["value"]
    ideal = PropsSI("Hmass", "P", p2, "Smass", s1, "Water")
    outlet = h1 - 0.72 * (h1 - ideal)
    build.step(
        "equipment.TG-2.efficiency",
        "equipment.TG-2",
        "The isentropic efficiency of TG-2 fixes the enthalpy behind the turbine.",
        "definition of isentropic efficiency",
        {"states.3.specific_enthalpy": outlet},
        ["states.1.specific_enthalpy", "equipment.TG-2.isentropic_efficiency"],
        [
            [
                r"h_{\mathrm{3}}",
                r"h_{\mathrm{1}} - \eta_{s,\mathrm{TG-2}} \left(h_{\mathrm{1}} - h_{s,\mathrm{TG-2}}\right)",
                rf"{enthalpy_text(h1)} - 0.72 \left({h1 / 1e3:.6g} - {ideal / 1e3:.6g}\right)"
                r"\,\mathrm{kJ\,kg^{-1}}",
                enthalpy_text(outlet),
            ]
        ],
    )
    state_step(build, "3", ("pressure", "specific_enthalpy"), "Steam behind the turbine.", 0.001)
    power = FLOW * (h1 - outlet)
    build.step(
        "equipment.TG-2.energy",
        "equipment.TG-2",
        "The power of TG-2 is the drop of enthalpy times the flow.",
        "first law, steady flow",
        {"equipment.TG-2.power": power},
        ["states.1.specific_enthalpy", "states.3.specific_enthalpy", "states.1.mass_flow"],
        [
            [
                r"\dot W_{\mathrm{TG-2}}",
                r"\dot m_{\mathrm{1}} \left(h_{\mathrm{1}} - h_{\mathrm{3}}\right)",
                rf"{FLOW:.5g}\,\mathrm{{kg\,s^{{-1}}}}"
                rf" \left({h1 / 1e3:.6g} - {outlet / 1e3:.6g}\right)\,\mathrm{{kJ\,kg^{{-1}}}}",
                rf"{power / 1e3:.4g}\,\mathrm{{kW}}",
            ]
        ],
        0.011,
    )
    piece(build, "PRV-3", "1", "2", 0.0)
    piece(build, "TG-2", "1", "3", power)
    valve = build.values["equipment.PRV-3.entropy_generation"]["value"]
    turbine = build.values["equipment.TG-2.entropy_generation"]["value"]
    for owner, generation in (("trains.valve", valve), ("trains.turbine", turbine), ("total", valve)):
        tag = "TG-2" if owner == "trains.turbine" else "PRV-3"
        name = owner.split(".")[-1]
        sources = [f"equipment.{tag}.entropy_generation"]
        build.step(
            f"{owner}.totals",
            owner,
            "Sums over the pieces.",
            "sum over the pieces",
            {f"{owner}.entropy_generation": generation, f"{owner}.lost_work": AMBIENT * generation},
            sources,
            [
                [
                    rf"\dot S_{{\mathrm{{gen}},\mathrm{{{name}}}}}",
                    rf"\dot S_{{\mathrm{{gen}},\mathrm{{{tag}}}}}",
                    rf"{generation / 1e3:.4g}\,\mathrm{{kW\,K^{{-1}}}}",
                    rf"{generation / 1e3:.4g}\,\mathrm{{kW\,K^{{-1}}}}",
                ]
            ],
            0.0105,
        )
    flow_entropy = {n: FLOW * build.values[f"states.{n}.specific_entropy"]["value"] for n in "123"}
    for state, carried in flow_entropy.items():
        build.add(f"states.{state}.entropy_flow", carried, [f"states.{state}.specific_entropy"], None, None)
    return build
