"""An invented record for the tests of the report: a steam valve and the turbine that could stand in its place."""

from __future__ import annotations

import copy
import functools
from typing import Any

from reportgen.record import Record
from tests.report.invented_plant import FLOW, figure_data, solved


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
    build = solved()
    valve = build.values["equipment.PRV-3.entropy_generation"]["value"]
    turbine = build.values["equipment.TG-2.entropy_generation"]["value"]
    power = build.values["equipment.TG-2.power"]["value"]
    flow_entropy = {state: build.values[f"states.{state}.entropy_flow"]["value"] for state in "123"}
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
            "sum_entering": flow_entropy["1"],
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
                    "column": 1,
                },
                "method": {
                    "text": "Steady-flow balances of mass, energy and entropy round each piece.",
                    "file": "method.md",
                    "line": 1,
                    "column": 1,
                },
                "conclusion": {
                    "text": 'The valve generates {{ value("equipment.PRV-3.entropy_generation") }}; in its place the '
                    'turbine would deliver {{ value("equipment.TG-2.power", uncertainty=True) }}.',
                    "file": "calculation.toml",
                    "line": 16,
                    "column": 1,
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
