"""An invented record for the tests of the report: a steam valve and the turbine that could stand in its place.

Plant, tags, limits and uncertainties are invented; properties come from CoolProp. Uncertainties of results are made
up in a fixed proportion: these tests look at what a page shows, not at what evaluation finds.
"""

from __future__ import annotations

import copy
import functools
from typing import Any

import numpy
from CoolProp.CoolProp import PropsSI

from reportgen.names import DIMENSIONS, NAMES, symbol_of
from reportgen.record import Record

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


def budget_of(value: float) -> dict[str, Any]:
    """A budget with invented shares."""
    shares = {"states.1.mass_flow": 0.9, "states.1.pressure": 0.1}
    steps = {"states.1.mass_flow": FLOW * 0.01, "states.1.pressure": 15000.0}
    combined = 0.0105 * value
    return {
        "value": value,
        "standard_uncertainty": combined,
        "expanded_uncertainty": 2 * combined,
        "coverage_factor": 2.0,
        "coverage_probability": 0.9545,
        "effective_degrees_of_freedom": None,
        "contributions": [
            {
                "input": path,
                "standard_uncertainty": steps[path],
                "degrees_of_freedom": None,
                "sensitivity": combined * share**0.5 / steps[path],
                "contribution": combined * share**0.5,
                "share": share,
                "curvature": 1e-4 * combined,
            }
            for path, share in shares.items()
        ],
    }


@functools.cache
def _data() -> dict[str, Any]:
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
    t2 = build.values["states.2.temperature"]["value"]

    def account(title: str, tag: str, state: str) -> dict[str, Any]:
        generation = build.values[f"equipment.{tag}.entropy_generation"]["value"]
        return {
            "title": title,
            "entering": [
                {"label": "with steam, state 1", "path": "states.1.entropy_flow", "value": flow_entropy["1"]},
                {"label": f"with heat, {tag}", "path": f"equipment.{tag}.heat", "value": 0.0},
            ],
            "generated": [
                {"label": f"generated in {tag}", "path": f"equipment.{tag}.entropy_generation", "value": generation}
            ],
            "leaving": [
                {
                    "label": f"with steam, state {state}",
                    "path": f"states.{state}.entropy_flow",
                    "value": flow_entropy[state],
                }
            ],
            "sum_entering": flow_entropy["1"] + generation,
            "sum_leaving": flow_entropy[state],
        }

    def equipment(kind: str, title: str, kind_title: str, train: str, outlet: str, limits: bool) -> dict[str, Any]:
        return {
            "kind": kind,
            "title": title,
            "kind_title": kind_title,
            "train": train,
            "ports": [
                {"name": "inlet", "direction": "in", "state": "1"},
                {"name": "outlet", "direction": "out", "state": outlet},
            ],
            "limits": {"pressure": 46.01e5, "temperature": 623.15, "material": "carbon steel", "source": "DS-221 rev 3"}
            if limits
            else None,
        }

    lost = build.values["equipment.PRV-3.lost_work"]["value"]
    return {
        "calculation": {
            "number": "SB-TH-014",
            "title": "Letdown station: entropy generated and work forgone",
            "revision": "A",
            "date": "2026-03-12",
            "owner": "Saltbeck Energy",
            "client": "Orrin Paper",
            "location": "Boiler house 2",
            "status": "preliminary",
            "units": "SI",
            "originator": None,
            "checker": None,
            "approver": None,
            "coverage_factor": 2.0,
            "method": "first-order",
            "narratives": {
                "purpose": {
                    "text": "Saltbeck Energy lets steam down from the header to the mill main through **PRV-3**.\n"
                    "The review asks what the valve forgoes, and what turbine **TG-2** would win in its place.",
                    "file": "calculation.toml",
                    "line": 12,
                },
                "method": {
                    "text": "Steady-flow balances of mass, energy and entropy round each piece.",
                    "file": "method.md",
                    "line": 1,
                },
                "conclusion": {
                    "text": 'The valve generates {{ value("equipment.PRV-3.entropy_generation") }}; in its place the '
                    'turbine would deliver {{ value("equipment.TG-2.power", uncertainty=True) }}.',
                    "file": "calculation.toml",
                    "line": 16,
                },
            },
            "references": [
                {"id": "R1", "text": "IAPWS R6-95(2018), thermodynamic properties of ordinary water substance"},
                {"id": "R2", "text": "Line sizing calculation SB-PI-102 rev B"},
            ],
            "revisions": [{"index": "A", "date": "2026-03-12", "description": "First issue for review"}],
        },
        "plant": {
            "fluids": {
                "steam": {
                    "title": "Water",
                    "model": "real-fluid",
                    "substance": "water",
                    "composition": None,
                    "entropy_zero": "zero for the saturated liquid at the triple point, 273.16 K",
                    "sources": ["W. Wagner and A. Pruss, J. Phys. Chem. Ref. Data 31 (2002) 387, 10.1063/1.1461829"],
                    "limits": {
                        "minimum_temperature": 273.16,
                        "maximum_temperature": 2000.0,
                        "maximum_pressure": 1e9,
                    },
                }
            },
            "states": {
                "1": {"fluid": "steam", "title": "HP header", "mass_flow": "states.1.mass_flow"},
                "2": {"fluid": "steam", "title": "behind the valve", "mass_flow": "states.2.mass_flow"},
                "3": {"fluid": "steam", "title": "behind the turbine", "mass_flow": "states.3.mass_flow"},
            },
            "equipment": {
                "PRV-3": equipment("throttling-valve", "Letdown valve", "Throttling valve", "valve", "2", True),
                "TG-2": equipment("turbine", "Back-pressure turbine", "Turbine", "turbine", "3", False),
            },
            "trains": {
                "valve": {"title": "Letdown valve", "equipment": ["PRV-3"], "alternative_to": None, "position": 0},
                "turbine": {
                    "title": "Back-pressure turbine",
                    "equipment": ["TG-2"],
                    "alternative_to": "valve",
                    "position": 1,
                },
            },
            "surroundings": {"temperature": "surroundings.temperature", "pressure": "surroundings.pressure"},
        },
        "inputs": build.inputs,
        "values": build.values,
        "relations": build.relations,
        "solution_order": build.order,
        "assumptions": [
            {
                "id": "A1",
                "text": "Velocities at both flanges below 40 m/s.",
                "origin": "author",
                "basis": "Line sizing calculation SB-PI-102 rev B",
                "status": "to be verified",
                "owner": "Piping",
                "due": "2026-04-30",
                "affects": [],
                "test": None,
            },
            {
                "id": "heat.PRV-3",
                "text": "PRV-3 exchanges no heat with its surroundings.",
                "origin": "automatic",
                "basis": "custom for a throttling valve when nothing else determines the heat",
                "status": "accepted",
                "owner": None,
                "due": None,
                "affects": ["equipment.PRV-3.heat"],
                "test": None,
            },
            {
                "id": "heat.TG-2",
                "text": "TG-2 exchanges no heat with its surroundings.",
                "origin": "automatic",
                "basis": "custom for a turbine when nothing else determines the heat",
                "status": "accepted",
                "owner": None,
                "due": None,
                "affects": ["equipment.TG-2.heat"],
                "test": {
                    "finding": "With 1 % of the power lost through the casing one result or more changes noticeably.",
                    "text": "Rule: noticeable from a tenth of U, decisive from U.",
                    "model_value": power,
                    "other_value": power * 0.99,
                    "difference": -power * 0.01,
                    "unit": "W",
                    "dimension": "power",
                    "path": "equipment.TG-2.power",
                    "verdict": "noticeable",
                },
            },
        ],
        "cautions": [
            {
                "id": "T32",
                "severity": "stop",
                "text": "Outlet of PRV-3 above its design temperature.",
                "path": "states.2.temperature",
                "value": t2,
                "limit": 623.15,
                "margin": 623.15 - t2,
                "expanded_uncertainty": 1.6,
                "dimension": "temperature",
                "decided": True,
                "source": "Data sheet DS-221 rev 3",
                "adjusted": None,
            },
            {
                "id": "T19",
                "severity": "warning",
                "text": "Inlet of PRV-3 above 90 % of the maximum allowable pressure: show the operating margin.",
                "path": "states.1.pressure",
                "value": 40.013e5,
                "limit": 44e5,
                "margin": 3.987e5,
                "expanded_uncertainty": 0.3e5,
                "dimension": "pressure",
                "decided": True,
                "source": "see ASME VIII; API 520, current edition",
                "adjusted": None,
            },
            {
                "id": "T22",
                "severity": "note",
                "text": "A note without a number.",
                "path": "states.1.temperature",
                "value": None,
                "limit": None,
                "margin": None,
                "expanded_uncertainty": None,
                "dimension": None,
                "decided": False,
                "source": "common practice",
                "adjusted": "Checked by the author against a second source",
            },
        ],
        "audits": {
            "second_law": [
                {
                    "owner": f"equipment.{tag}",
                    "path": f"equipment.{tag}.entropy_generation",
                    "value": generation,
                    "expanded_uncertainty": generation * 0.021,
                    "interval": [generation * 0.979, generation * 1.021],
                    "verdict": "generates entropy",
                    "heaviest_inputs": ["states.1.mass_flow", "states.1.pressure"],
                }
                for tag, generation in (("PRV-3", valve), ("TG-2", turbine))
            ],
            "closure": [
                {"owner": "total", "quantity": "mass", "value": 0.0, "scale": FLOW, "relative": 0.0, "unit": "kg/s"},
                {
                    "owner": "total",
                    "quantity": "energy",
                    "value": 2.3e-9,
                    "scale": 4.64e6,
                    "relative": 5e-16,
                    "unit": "W",
                },
                {
                    "owner": "total",
                    "quantity": "entropy",
                    "value": -1.1e-12,
                    "scale": 9780.0,
                    "relative": 1e-16,
                    "unit": "W/K",
                },
            ],
        },
        "accounts": {
            "valve": account("Letdown valve", "PRV-3", "2"),
            "turbine": account("Back-pressure turbine", "TG-2", "3"),
        },
        "criteria": [
            {
                "id": "C1",
                "path": "equipment.PRV-3.lost_work",
                "comparison": "at_most",
                "limit": 4e5,
                "limit_text": "400 kW",
                "value": lost,
                "expanded_uncertainty": lost * 0.021,
                "dimension": "power",
                "decision": "met",
                "basis": "Screening threshold for a back-pressure turbine",
            },
            {
                "id": "C2",
                "path": "equipment.TG-2.power",
                "comparison": "at_least",
                "limit": 3.6e5,
                "limit_text": "360 kW",
                "value": power,
                "expanded_uncertainty": power * 0.022,
                "dimension": "power",
                "decision": "not decided",
                "basis": "Least power the supplier quotes for",
            },
        ],
        "summary": [
            "equipment.PRV-3.entropy_generation",
            "equipment.PRV-3.lost_work",
            "equipment.TG-2.entropy_generation",
            "equipment.TG-2.power",
            "total.entropy_generation",
        ],
        "uncertainty_budget": {"equipment.PRV-3.entropy_generation": budget_of(valve)},
        "figures": figure_data(build),
        "provenance": {
            "program": {"name": "reportgen", "version": "0.1.0"},
            "python": "3.11.2",
            "packages": {"numpy": "2.4.6", "scipy": "1.17.1"},
            "files": [{"name": "calculation.toml", "sha256": "0" * 64}],
            "fluid_data": [{"file": "water.json", "sha256": "1" * 64, "source": "IAPWS R6-95(2018)"}],
            "git": {"commit": None, "clean": None},
        },
    }


def invented_data() -> dict[str, Any]:
    """A fresh copy of the invented record's data, to be changed at will."""
    return copy.deepcopy(_data())


def invented_record() -> Record:
    """The invented record."""
    return Record(invented_data())
