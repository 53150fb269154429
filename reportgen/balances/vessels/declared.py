"""What both kinds of vessel declare alike. Needs no numerical library: the schema of the file is made from it."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from typing import Any, NamedTuple

from reportgen.balances.kinds import Choice, Group, Kind, Parameter, Port
from reportgen.balances.plant import Piece

__all__ = ["ORIFICE", "OUTLET", "RESULTS", "VOLUME", "WALL", "Omission", "final_pressure", "omissions", "vessel_kind"]

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


class Omission(NamedTuple):
    """What is missing: its name, why, what would do, and the given quantity that asks for it (empty: the kind does)."""

    name: str
    text: str
    expected: str
    cause: str = ""


def omissions(kind: str, has: Callable[[str], bool]) -> Iterator[Omission]:
    """What a vessel lacks; ``has`` tells whether a name such as ``wall.area`` is given for it."""
    if not has("volume"):
        yield Omission("volume", '"volume" is missing.', "the inner volume of the vessel")
    discharge = kind == "discharge"
    if discharge and not has("back_pressure") and not has("final_pressure"):
        yield Omission(
            "final_pressure", "Nothing says where the discharge ends.", "final_pressure, back_pressure, or both"
        )
    if discharge and has("orifice") and not has("back_pressure"):
        text = "The flow through the orifice needs the pressure behind it."
        yield Omission("back_pressure", text, "back_pressure beside it", "orifice")
    if has("wall.heat_transfer") and not has("orifice"):
        text = "Heat passes from the wall at a finite rate, but nothing says how much time there is."
        expected = "an orifice, or no heat_transfer: then the metal has the temperature of the content"
        yield Omission("orifice", text, expected, "wall.heat_transfer")
    if has("wall.heat_transfer") and not has("wall.area"):
        text = "The heat transfer coefficient needs the area that it holds for."
        yield Omission("wall.area", text, "area beside it", "wall.heat_transfer")
