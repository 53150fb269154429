"""The vessels of a plant: checked views, and their quantities as arrays along the sample axis."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import numpy as np
import numpy.typing as npt

from reportgen.balances.kinds import vessel_kinds
from reportgen.balances.plant import Piece, Plant, port_faults
from reportgen.balances.vessels import PREFIX
from reportgen.balances.vessels.contents import Outlet
from reportgen.balances.vessels.declared import omissions
from reportgen.balances.vessels.following import Body, Vessel, Wall
from reportgen.errors import Fault, InputError, SolutionError

__all__ = ["vessel_of", "vessels_of"]

Array = npt.NDArray[np.float64]
#: Quantities of a vessel that must be positive.
_POSITIVE = (
    "volume",
    "supply_volume",
    "back_pressure",
    "final_pressure",
    "wall.mass",
    "wall.specific_heat",
    "wall.area",
    "wall.heat_transfer",
    "wall.initial_temperature",
    "orifice.diameter",
    "orifice.discharge_coefficient",
)
_FIELDS = {
    "pressure": "pressure",
    "temperature": "temperature",
    "density": "density",
    "energy": "specific_internal_energy",
    "enthalpy": "specific_enthalpy",
    "entropy": "specific_entropy",
}


def vessels_of(plant: Plant, given: frozenset[str]) -> dict[str, Piece]:
    """A checked view of every vessel, by its tag; InputError with every fault of their structure."""
    registry = vessel_kinds()
    faults: list[Fault] = []
    vessels: dict[str, Piece] = {}
    for tag, definition in plant.vessels.items():
        kind = registry.get(definition.kind)
        if kind is None:
            place = f"{PREFIX}{tag}.kind"
            faults.append(Fault("Unknown kind.", place, found=definition.kind, expected=", ".join(registry)))
            continue
        piece = Piece(tag, kind, definition, plant, given)
        found = port_faults(piece, definition, plant)
        faults += found or _structure(piece)
        vessels[tag] = piece
    if faults:
        raise InputError(faults)
    return vessels


def _structure(piece: Piece) -> list[Fault]:
    """What is wrong with fluids, and what is given without what it needs."""
    faults = []
    states = [state for port in ("initial", "supply") for state in piece.states(port)]
    fluid = piece.fluid(states[0])
    if fluid.kind == "incompressible":
        text = "An incompressible fluid keeps its density: its pressure does not tell how much of it is in a vessel."
        faults.append(Fault(text, piece.path("initial"), found=states[0], expected="a state of a compressible fluid"))
    if fluid.kind == "cubic" and fluid.composition is not None and len(fluid.composition) > 1:
        text = "Mixtures by a cubic equation of state are not followed: their phases differ in composition."
        faults.append(Fault(text, piece.path("initial" if piece.states("initial") else "supply"), found=states[0]))
    if len({piece.fluid_id(state) for state in states}) > 1:
        text = "What enters is of another fluid than the content."
        expected = f"a state of fluid {piece.fluid_id(states[0])}"
        faults.append(Fault(text, piece.path("supply"), found=states[1], expected=expected))

    def has(name: str) -> bool:
        path = piece.path(name)
        return any(given == path or given.startswith(f"{path}.") for given in piece.given)

    for omission in omissions(piece.kind.name, has):
        place = piece.path(omission.cause or omission.name)
        faults.append(Fault(omission.text, place, found=omission.cause or None, expected=omission.expected))
    if piece.kind.name == "discharge" and piece.choice("outlet") != "homogeneous":
        mixed = fluid.composition is not None and len(fluid.composition) > 1
        if mixed or not hasattr(fluid, "saturation"):
            text = f"{fluid.title} has no two phases of one composition that could leave apart."
            faults.append(Fault(text, piece.path("outlet"), found=piece.choice("outlet"), expected="homogeneous"))
    return faults


def vessel_of(piece: Piece, values: Mapping[str, Any], columns: int) -> Vessel:
    """Quantities of one vessel, shape (N,). SolutionError where they cannot be meant in the base case.

    A column in which the pressures do not allow the flow has a final pressure of NaN, and no result.
    """

    def get(name: str) -> Array | None:
        found = values.get(piece.path(name))
        return None if found is None else np.broadcast_to(np.asarray(found, dtype=float), (columns,))

    faults = [
        Fault("The value is not positive.", piece.path(name), numbers=((piece.path(name), float(found[0])),))
        for name in _POSITIVE
        if (found := get(name)) is not None and not found[0] > 0.0
    ]
    if faults:
        raise SolutionError(faults)
    charging = piece.kind.name == "charging"
    initial = _body(piece, "initial", values, columns)
    supply = _body(piece, "supply", values, columns) if charging else None
    volume = get("volume")
    assert volume is not None  # the structure is checked
    diameter, coefficient = get("orifice.diameter"), get("orifice.discharge_coefficient")
    area = None
    if diameter is not None:
        area = np.pi / 4.0 * diameter**2 * (1.0 if coefficient is None else coefficient)
    chosen: Any = "homogeneous" if charging else piece.choice("outlet")
    outlet: Outlet = chosen
    vessel = Vessel(
        charging=charging,
        fluid=piece.fluid(piece.states("supply" if charging else "initial")[0]),
        volume=volume,
        initial=initial,
        supply=supply,
        supply_volume=get("supply_volume"),
        outlet=outlet,
        back_pressure=get("back_pressure"),
        final_pressure=_ordered(piece, initial, supply, get("back_pressure"), get("final_pressure")),
        wall=_wall(get, initial, values, columns),
        flow_area=area,
    )
    return vessel


def _body(piece: Piece, port: str, values: Mapping[str, Any], columns: int) -> Body | None:
    states = piece.states(port)
    if not states:
        return None
    fields = {}
    for field, name in _FIELDS.items():
        path = f"states.{states[0]}.{name}"
        fields[field] = np.broadcast_to(np.asarray(values.get(path, np.nan), dtype=float), (columns,))
        if not np.isfinite(fields[field][0]):
            text = f"State {states[0]} is not known, from which {piece.title} begins or is fed."
            raise SolutionError(
                Fault(text, piece.path(port), found=states[0], expected="a state with known properties")
            )
    return Body(**fields)


def _wall(get: Any, initial: Body | None, values: Mapping[str, Any], columns: int) -> Wall | None:
    mass, heat = get("wall.mass"), get("wall.specific_heat")
    if mass is None or heat is None:
        return None
    temperature = get("wall.initial_temperature")
    if temperature is None:
        outside = np.broadcast_to(np.asarray(values["surroundings.temperature"], dtype=float), (columns,))
        temperature = outside if initial is None else initial.temperature
    area, coefficient = get("wall.area"), get("wall.heat_transfer")
    return Wall(mass * heat, None if coefficient is None else area * coefficient, temperature)


def _ordered(
    piece: Piece, initial: Body | None, supply: Body | None, back: Array | None, final: Array | None
) -> Array | None:
    """The final pressure, NaN in columns without flow; SolutionError where the base case has none."""
    checks: list[tuple[str, str, Array | None, Array | None]] = []
    before = None if initial is None else initial.pressure
    if supply is None:
        checks.append(("final_pressure", "not below that of the content in the beginning", final, before))
        checks.append(("back_pressure", "not below that of the content in the beginning", back, before))
        # Equal pressures are the balance in which a discharge may end.
        lower = None if back is None else back * (1.0 - 1e-12)
        checks.append(("final_pressure", "below the back pressure, which the content does not reach", lower, final))
    else:
        reachable = supply.pressure * (1.0 + 1e-12)
        checks.append(("supply", "not above that of the content in the beginning", before, supply.pressure))
        checks.append(("final_pressure", "not above that of the content in the beginning", before, final))
        checks.append(("final_pressure", "above that of the supply", final, reachable))
    faults, wrong = [], np.zeros(1, dtype=bool)
    for name, text, lower, upper in checks:
        if lower is None or upper is None:
            continue
        wrong = wrong | ~(lower < upper)
        if not lower[0] < upper[0]:
            path = piece.path(name)
            shown = final if name == "final_pressure" else back if name == "back_pressure" else None
            numbers = () if shown is None else ((path, float(shown[0])),)
            faults.append(Fault(f"The pressure is {text}.", path, numbers=numbers))
    if faults:
        raise SolutionError(faults)
    if final is None:
        return None
    return np.where(wrong, np.nan, final)
