"""The caution on the second law itself."""

from __future__ import annotations

from collections.abc import Iterator

from reportgen.evaluation.audits import entropy_resolution, heaviest_inputs
from reportgen.evaluation.cautions.entry import Finding, caution
from reportgen.evaluation.evaluated import EvaluatedPlant

__all__ = ["negative_entropy_generation"]


#: Doubts by which a piece destroys entropy for a reason that can be named.
PRESSURE_DOUBTS = ("pressure-rises", "pressure-against-machine")


@caution("T01", "stop", "Impossible by the second law", source="second law of thermodynamics", undecided="never")
def negative_entropy_generation(plant: EvaluatedPlant, _limit: float) -> Iterator[Finding]:
    """Entropy generation of a piece or process below zero by more than its uncertainty.

    An interval that reaches across zero is the matter of the second-law audit, and no caution; so is what the
    arithmetic leaves of a zero.
    """
    families = {"equipment": plant.kinds, "processes": plant.processes, "vessels": plant.vessels}
    members = [(family, tag) for family, tags in families.items() for tag in tags]
    for family, tag in members:
        owner = f"{family}.{tag}"
        path = f"{owner}.entropy_generation"
        samples = plant.samples(path)
        if abs(samples[0]) <= entropy_resolution(plant, owner, (tag,)):
            continue
        heaviest = ", ".join(heaviest_inputs(plant.axis, samples))
        pressures = [
            doubt.path
            for doubt in plant.doubts
            if doubt.owner == owner and doubt.key in PRESSURE_DOUBTS and doubt.stands
        ]
        text = f"{tag} would destroy entropy: what is given cannot be true together. "
        if pressures:
            text += "Its pressure changes the wrong way from inlet to outlet; look at the two pressures first."
        elif heaviest:
            text += f"Look first at {heaviest}."
        else:
            text += "Look at the readings, the boundary and the assumptions."
        yield Finding(path, samples, 0.0, "above", text, plant.dimension_of(path))
