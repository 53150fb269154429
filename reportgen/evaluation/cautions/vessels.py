"""Cautions on vessels: cold metal, hot liners."""

from __future__ import annotations

from collections.abc import Iterator

from reportgen.evaluation.cautions.entry import Finding, caution
from reportgen.evaluation.evaluated import EvaluatedPlant
from reportgen.evaluation.vessels import minimum_metal_temperature

__all__ = ["brittle_fracture", "hydrogen_liner"]

#: Lowest temperature of carbon steel without a test of toughness [K]; −29 °C.
CARBON_STEEL = 244.15
#: Highest temperature of the liner of a composite vessel [K]; 85 °C.
LINER = 358.15
#: Words that name a steel which is not carbon steel, or no steel at all.
_TOUGH = ("stainless", "austenitic", "nickel", "aluminium", "aluminum", "copper", "composite", "low-temperature")


@caution(
    "T03",
    "warning",
    "Brittle fracture",
    source="see ASME B31.3 and ASME BPVC Section VIII UCS-66, current edition",
    limit=CARBON_STEEL,
    dimension="temperature",
)
def brittle_fracture(plant: EvaluatedPlant, limit: float) -> Iterator[Finding]:
    """Metal of a vessel below −29 °C where it is carbon steel or its material is not stated.

    Looked at is the lowest temperature of the wall, or, without one, that of the content. A minimum temperature of the
    vessel's own limits takes the place of this one (T32).
    """
    for tag, vessel in plant.vessels.items():
        material = "" if vessel.limits is None else vessel.limits.material or ""
        stated = vessel.limits is not None and vessel.limits.minimum_temperature is not None
        if stated or any(word in material.casefold() for word in _TOUGH):
            continue
        path, samples = minimum_metal_temperature(plant, tag)
        of = f"of {material}" if material else "of a material that is not stated"
        taken = "the metal" if vessel.metal else "the content, which the metal may follow,"
        yield Finding(
            path,
            samples,
            limit,
            "above",
            f"In {tag} {taken} ⟦falls|may fall⟧ below the temperature down to which carbon steel is used without "
            f"a test of its toughness; the vessel is {of}. Its minimum design metal temperature depends on thickness.",
            "temperature",
            owner=f"vessels.{tag}",
        )


@caution(
    "T15",
    "stop",
    "Hot hydrogen in a composite vessel",
    source="see ISO 15869 and SAE J2601, current edition",
    limit=LINER,
    dimension="temperature",
)
def hydrogen_liner(plant: EvaluatedPlant, limit: float) -> Iterator[Finding]:
    """Hydrogen above 85 °C in a vessel of composite, or of a material that is not stated (then a warning)."""
    for tag, vessel in plant.vessels.items():
        fluid = plant.fluid_of(vessel.states[0])
        if "hydrogen" not in (fluid.substance or fluid.title).casefold() and fluid.substance != "H2":
            continue
        material = "" if vessel.limits is None else vessel.limits.material or ""
        if material and "composite" not in material.casefold():
            continue
        path = f"vessels.{tag}.maximum_temperature"
        yield Finding(
            path,
            plant.samples(path),
            limit,
            "below",
            f"Hydrogen in {tag} ⟦becomes|may become⟧ hotter than the liner of a composite vessel may be"
            + ("." if material else "; the material of the vessel is not stated."),
            "temperature",
            owner=f"vessels.{tag}",
            severity="stop" if material else "warning",
        )
