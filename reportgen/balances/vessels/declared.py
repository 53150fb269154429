"""What both kinds of vessel declare alike. Needs no numerical library: the schema of the file is made from it."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from reportgen.balances.kinds import Choice, Group, Kind, Parameter, Port
from reportgen.balances.plant import Piece

__all__ = ["ORIFICE", "OUTLET", "RESULTS", "VOLUME", "WALL", "final_pressure", "vessel_kind"]

VOLUME = Parameter("volume", "volume", "Inner volume.")
WALL = Group(
    "wall",
    (
        Parameter("mass", "mass", "Mass of the metal that takes part."),
        Parameter("specific_heat", "specific_entropy", "Specific heat capacity of the metal."),
        Parameter("area", "area", "Area in touch with the content."),
        Parameter(
            "heat_transfer",
            "heat_transfer_coefficient",
            "Heat transfer coefficient to the content.",
            "the metal has the temperature of the content",
        ),
        Parameter(
            "initial_temperature",
            "temperature",
            "Temperature of the metal in the beginning.",
            "that of the content, or, where that is evacuated, that of the surroundings",
        ),
    ),
    "Metal that gives heat to the content or takes it up; nothing passes to the outside.",
    single=True,
    needed=("mass", "specific_heat"),
)
ORIFICE = Group(
    "orifice",
    (
        Parameter("diameter", "length", "Diameter."),
        Parameter("discharge_coefficient", "ratio", "Discharge coefficient.", "1"),
    ),
    "Opening that lets the mass pass, by which time comes into the path.",
    single=True,
    needed=("diameter",),
)
OUTLET = Choice(
    "outlet",
    ("homogeneous", "vapour", "liquid"),
    "What leaves a two-phase content: the content as it is, or one of its phases.",
)
#: What every vessel reports, beside its parameters.
RESULTS = (
    "heat",
    "work",
    "mass_transferred",
    "initial_mass",
    "final_mass",
    "initial_energy",
    "final_energy",
    "enthalpy_with_mass",
    "initial_entropy",
    "final_entropy",
    "entropy_change",
    "entropy_with_heat",
    "entropy_with_mass",
    "entropy_generation",
    "vessel_entropy_generation",
    "valve_entropy_generation",
    "wall_entropy_generation",
    "lost_work",
    "final_pressure",
    "final_temperature",
    "final_quality",
    "minimum_temperature",
    "maximum_temperature",
    "final_wall_temperature",
    "minimum_wall_temperature",
    "followed_pressure",
    "followed_temperature",
    "duration",
    "maximum_mass_flow",
    "mass_imbalance",
    "energy_imbalance",
    "closure",
)


def final_pressure(default: str) -> Parameter:
    """The pressure at which the path ends."""
    return Parameter("final_pressure", "pressure", "Pressure of the content in the end.", default)


def _none(piece: Piece) -> Sequence[Any]:
    return ()


def vessel_kind(
    name: str,
    title: str,
    text: str,
    ports: tuple[Port, ...],
    parameters: tuple[Parameter, ...],
    choices: tuple[Choice, ...] = (),
    reports: tuple[str, ...] = (),
) -> Kind:
    """A kind of vessel; it adds no relations to the network."""
    return Kind(
        name=name,
        title=title,
        text=text,
        ports=ports,
        parameters=(VOLUME, *parameters),
        relations=_none,
        defaults=_none,
        results=_none,
        heats=_none,
        stretches=_none,
        groups=(WALL, ORIFICE),
        choices=choices,
        reports=(*RESULTS, *reports),
        family="vessels",
    )
