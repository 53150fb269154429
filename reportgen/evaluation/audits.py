"""Audits of a solved plant: the second law with its uncertainty, and whether every balance closes.

The closures are computed here from states, heats and powers alone, round each piece, round each train and round the
whole, and not taken from the relations that solved the plant: a wrong relation would show.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from typing import Any

import numpy as np
import numpy.typing as npt

from reportgen.evaluation import uncertainty
from reportgen.evaluation.closed import closed_balances, closed_owners
from reportgen.evaluation.decisions import SecondLaw, second_law
from reportgen.evaluation.evaluated import EvaluatedPlant
from reportgen.evaluation.sampling import SampleAxis
from reportgen.evaluation.vessels import vessel_balances, vessel_owners
from reportgen.names import DIMENSIONS

__all__ = [
    "balance_round",
    "balances_of",
    "boundary_streams",
    "closure_audit",
    "counted_pieces",
    "heaviest_inputs",
    "second_law_audit",
    "settle_zeros",
]

Array = npt.NDArray[np.float64]

#: Standard acceleration of free fall [m/s2], exact by convention: ISO 80000-3.
FREE_FALL = 9.80665

#: What arithmetic and iterations may leave of an entropy balance, as a part of the entropy flows in it.
BALANCE_RESOLUTION = 1e-9
#: The same for heat that an energy balance leaves, as a part of the energy flows in it.
HEAT_RESOLUTION = 1e-10
#: The same for what is left of the balances themselves, as a part of the terms of each.
RESIDUAL_RESOLUTION = 1e-10
#: Values that hold what is left of a balance.
RESIDUALS = {"mass": ("mass_imbalance",), "energy": ("energy_imbalance",), "entropy": ("closure",)}

HEAVIEST = 3


def settle_zeros(plant: EvaluatedPlant, totals: Sequence[str]) -> None:
    """Put an exact 0 where only rounding stands, in place.

    A splitter takes up no heat and generates nothing, but differences of its flows leave some 1e-16 of them; shown,
    such a number would pretend to a meaning. Concerned are heat below HEAT_RESOLUTION of the energy flows through its
    owner and entropy generation below BALANCE_RESOLUTION of the entropy flows, in every column, with the values
    derived from them; and what is left of each balance below RESIDUAL_RESOLUTION of its terms, column by column.
    """
    for owner, tags in _owners(plant, totals):
        for quantity, part, names in (
            ("energy", HEAT_RESOLUTION, ("heat", "entropy_with_heat")),
            ("entropy", BALANCE_RESOLUTION, ("entropy_generation", "lost_work", "entropy_generation_number")),
        ):
            samples = plant.samples(f"{owner}.{names[0]}")
            scale = balances_of(plant, owner, tags)[quantity][1]
            known = samples[np.isfinite(samples)]
            if known.size and np.any(known != 0.0) and np.all(np.abs(known) <= part * scale):
                for name in names:
                    if plant.has(f"{owner}.{name}"):
                        plant.values[f"{owner}.{name}"][:] = 0.0
        for quantity, (_, scale) in balances_of(plant, owner, tags).items():
            for name in RESIDUALS[quantity]:
                left = plant.values.get(f"{owner}.{name}")
                if left is not None:
                    left[np.abs(left) <= RESIDUAL_RESOLUTION * scale] = 0.0


def second_law_audit(plant: EvaluatedPlant, totals: Sequence[str]) -> list[dict[str, Any]]:
    """Entropy generation with its interval against zero, for every piece, every train and the total.

    Args:
        plant: the solved plant.
        totals: tags that count in ``total``.

    Returns:
        Record entries. Owners without an entropy generation (heat enters through a boundary of unknown temperature)
        are left out; a warning of the solution says so.
    """
    entries = []
    for owner, tags in _owners(plant, totals):
        path = f"{owner}.entropy_generation"
        if not plant.has(path):
            continue
        estimate = plant.estimate(path)
        resolution = entropy_resolution(plant, owner, tags)
        entries.append(
            {
                "owner": owner,
                "path": path,
                "dimension": plant.dimension_of(path),
                "value": estimate.value,
                "expanded_uncertainty": estimate.expanded_uncertainty,
                "interval": list(estimate.interval),
                "resolution": resolution,
                "verdict": (verdict := second_law(estimate.value, estimate.expanded_uncertainty, resolution)),
                "text": _VERDICTS[verdict].format(owner=_owner_words(owner)),
                "heaviest_inputs": heaviest_inputs(plant.axis, plant.samples(path)),
            }
        )
    return entries


_VERDICTS: dict[SecondLaw, str] = {
    "generates entropy": "{owner} generates entropy: the whole interval lies above zero.",
    "not resolved from reversible": "{owner} is not resolved from reversible: the interval of its entropy generation "
    "reaches across zero.",
    "impossible as given": "{owner} is impossible as given: the whole interval of its entropy generation lies below "
    "zero.",
}


def _owner_words(owner: str) -> str:
    place, _, name = owner.partition(".")
    words = {"equipment": name, "processes": f"Process {name}", "vessels": f"Vessel {name}", "trains": f"Train {name}"}
    return words.get(place, "The closed part" if place == "closed" else "The whole")


def balances_of(plant: EvaluatedPlant, owner: str, tags: Sequence[str]) -> dict[str, tuple[float, float]]:
    """What the balances of an owner leave, with the size of their terms: rates of equipment, amounts of processes."""
    if owner.startswith("vessels."):
        return vessel_balances(plant, tags[0])
    return closed_balances(plant, tags) if plant.is_closed(owner) else balance_round(plant, tags)


def entropy_resolution(plant: EvaluatedPlant, owner: str, tags: Sequence[str]) -> float:
    """Size below which an entropy generation is a zero of the arithmetic [W/K, of processes J/K]."""
    scale = balances_of(plant, owner, tags)["entropy"][1]
    return BALANCE_RESOLUTION * scale if np.isfinite(scale) else 0.0


def heaviest_inputs(axis: SampleAxis, samples: Array, count: int = HEAVIEST) -> list[str]:
    """The uncertain inputs with the largest contributions to a result, heaviest first; samples of shape (N,)."""
    contribution = np.nan_to_num(np.abs(uncertainty.contributions(samples)))
    order = np.argsort(-contribution, kind="stable")[:count]
    return [axis.inputs[index] for index in order if contribution[index] > 0.0]


def closure_audit(plant: EvaluatedPlant, totals: Sequence[str]) -> list[dict[str, Any]]:
    """Mass, energy and entropy balance of each piece and process, each train and the whole in the base case.

    For trains and the whole the balance is drawn round the outer boundary, and what it leaves is the entropy the
    boundary sees less the sum over the parts. Quantities that cannot be computed (no flow, no boundary temperature)
    are left out; what is left of a balance by rounding is 0, as among the values.
    """
    entries = []
    for owner, tags in _owners(plant, totals):
        for quantity, (residual, scale) in balances_of(plant, owner, tags).items():
            if np.isfinite(residual):
                if abs(residual) <= RESIDUAL_RESOLUTION * scale:
                    residual = 0.0
                entries.append(
                    {
                        "owner": owner,
                        "quantity": quantity,
                        "value": residual,
                        "scale": scale,
                        "relative": abs(residual) / scale if scale > 0.0 else 0.0,
                        "unit": DIMENSIONS[plant.dimension_of(f"{owner}.{RESIDUALS[quantity][0]}")],
                    }
                )
    return entries


def balance_round(plant: EvaluatedPlant, tags: Sequence[str]) -> dict[str, tuple[float, float]]:
    """What mass, energy and entropy balances leave round a group of pieces, with the size of their terms.

        mass      Σin ṁ − Σout ṁ                                                        [kg/s]
        energy    Σ Q̇ + Ẇabsorbed − Ẇdelivered + Σin ṁ(h + V²/2 + g z) − Σout (same)    [W]
        entropy   Σout ṁ s − Σin ṁ s − Σ Ṡ_Q − Σ Ṡgen of the pieces                     [W/K]

    Only streams that cross the boundary of the group enter. Velocity and elevation count where they are known.

    Returns:
        Quantity to (residual, sum of the absolute terms), base case; NaN where a term is unknown.
    """
    entering, leaving = boundary_streams(plant, tags)
    signs = [(1.0, state) for state in entering] + [(-1.0, state) for state in leaving]
    mass, energy, entropy = [], [], []
    for sign, state in signs:
        flow = _base(plant, f"states.{state}.mass_flow")
        velocity = _base(plant, f"states.{state}.velocity", 0.0)
        elevation = _base(plant, f"states.{state}.elevation", 0.0)
        enthalpy = _base(plant, f"states.{state}.specific_enthalpy")
        mass.append(sign * flow)
        energy.append(sign * flow * (enthalpy + 0.5 * velocity**2 + FREE_FALL * elevation))
        entropy.append(-sign * flow * _base(plant, f"states.{state}.specific_entropy"))
    for tag in tags:
        for port in plant.heats[tag]:
            heat = _base(plant, port.heat)
            energy.append(heat)
            entropy.append(-_base(plant, port.entropy) if heat != 0.0 else 0.0)
        if plant.power_signs[tag]:
            energy.append(plant.power_signs[tag] * _base(plant, plant.work_path(tag)))
        entropy.append(-_base(plant, f"equipment.{tag}.entropy_generation"))
    return {
        name: (float(np.sum(terms)), float(np.sum(np.abs(terms))))
        for name, terms in (("mass", mass), ("energy", energy), ("entropy", entropy))
    }


def boundary_streams(plant: EvaluatedPlant, tags: Iterable[str]) -> tuple[list[str], list[str]]:
    """States that enter and that leave a group of pieces; a stream between two of them crosses no boundary.

    States joined inside the group appear as an outlet of one piece and an inlet of another.
    """
    tags = list(tags)
    entering = [
        connection.state for tag in tags for connection in plant.connections[tag] if connection.direction == "in"
    ]
    leaving = [
        connection.state for tag in tags for connection in plant.connections[tag] if connection.direction == "out"
    ]
    return [state for state in entering if state not in leaving], [state for state in leaving if state not in entering]


def counted_pieces(plant: EvaluatedPlant, alternatives: Iterable[str]) -> list[str]:
    """Tags that count in the total: every piece but those of trains that are alternatives to another."""
    left_out = {tag for train in alternatives for tag in plant.trains.get(train, ())}
    return [tag for tag in plant.kinds if tag not in left_out]


def _owners(plant: EvaluatedPlant, totals: Sequence[str]) -> list[tuple[str, Sequence[str]]]:
    """Pieces, trains and the total, then the same of processes, then vessels, each with its tags."""
    owners: list[tuple[str, Sequence[str]]] = [(f"equipment.{tag}", (tag,)) for tag in plant.kinds]
    owners += [(f"trains.{train}", tags) for train, tags in plant.trains.items()]
    owners += [("total", totals)] if totals else []
    return [*owners, *closed_owners(plant), *vessel_owners(plant)]


def _base(plant: EvaluatedPlant, path: str, absent: float = np.nan) -> float:
    value = float(plant.samples(path)[0])
    return absent if np.isnan(value) else value
