"""The caution on the second law itself."""

from __future__ import annotations

from collections.abc import Iterator

from reportgen.evaluation.audits import entropy_resolution, heaviest_inputs
from reportgen.evaluation.cautions.entry import Finding, caution
from reportgen.evaluation.evaluated import EvaluatedPlant

__all__ = ["negative_entropy_generation"]


@caution("T01", "stop", "Impossible by the second law", source="second law of thermodynamics", undecided=False)
def negative_entropy_generation(plant: EvaluatedPlant, _limit: float) -> Iterator[Finding]:
    """Entropy generation of a piece below zero by more than its uncertainty.

    An interval that reaches across zero is the matter of the second-law audit, and no caution.
    """
    for tag in plant.kinds:
        path = f"equipment.{tag}.entropy_generation"
        samples = plant.samples(path)
        heaviest = ", ".join(heaviest_inputs(plant.axis, samples))
        yield Finding(
            path,
            samples,
            -entropy_resolution(plant, (tag,)),
            "above",
            f"{tag} would destroy entropy: what is given cannot be true together. "
            + (f"Look first at {heaviest}." if heaviest else "Look at the readings, the boundary and the assumptions."),
            "entropy_flow",
        )
