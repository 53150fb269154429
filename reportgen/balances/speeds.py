r"""Velocities tied to flows: continuity, the throat of a nozzle, kinetic energies in efficiencies.

    ṁ = ρ A V ,   ṁ/A_throat = max ρ V along the isentropic path to the outlet pressure, V²/2 = h_1 + V_1²/2 − h

The largest flux is where the flow reaches the speed of sound (in the two-phase region that of homogeneous equilibrium);
where it is not reached, the throat is the outlet.
"""

from __future__ import annotations

from typing import Any

from reportgen.balances.composition import for_composition
from reportgen.balances.kinds import Parameter
from reportgen.balances.plant import Piece
from reportgen.balances.relations import Balance, Equation, Formula, Inverse, Term, token

__all__ = ["INLET_AREA", "OUTLET_AREA", "continuity", "kinetic_energy", "throat_relation", "throat_result"]

INLET_AREA = Parameter("inlet_area", "area", "Area of the flow at the inlet; given, it takes in the velocity there.")
OUTLET_AREA = Parameter("outlet_area", "area", "Area of the flow at the outlet.")

#: Pressures tried along the path, then rounds of closer looks round the best one.
_SCAN, _CLOSER, _ROUNDS = 33, 17, 3


def kinetic_energy(state: str, sign: float, factors: tuple[str, ...] = ()) -> Term:
    """± factors · V²/2."""
    velocity = f"states.{state}.velocity"
    return Term(0.5 * sign, (*factors, velocity, velocity), r"\tfrac{1}{2}")


def continuity(piece: Piece, state: str, area: str) -> Balance:
    """ṁ = ρ A V."""
    flow, density, velocity = (f"states.{state}.{name}" for name in ("mass_flow", "density", "velocity"))
    path = piece.path(area)
    return Balance(
        piece.path(f"{area}.relation"),
        piece.owner,
        "Continuity",
        f"{piece.title}: the flow of stream {state} fills its area at its density and velocity.",
        "conservation of mass, uniform velocity",
        (Term(1.0, (density, path, velocity)), Term(-1.0, (flow,))),
        {flow: Equation(token(flow), rf"{token(density)}\,{token(path)}\,{token(velocity)}")},
        {velocity: f"{piece.title}: flow, density and area give the velocity of stream {state}."},
    )


def _largest_flux(fluid: Any, p1: Any, h1: Any, s1: Any, p2: Any, v1: Any = 0.0) -> tuple[Any, Any]:
    """Largest ρ V [kg/(m2 s)] on the isentropic path and the pressure [Pa] where it is reached, shape (N,)."""
    import numpy as np

    p1, h1, s1, v1, p2 = (np.atleast_1d(np.asarray(part, float)) for part in np.broadcast_arrays(p1, h1, s1, v1, p2))
    with np.errstate(all="ignore"):
        total = h1 + 0.5 * v1**2
        low, high = np.zeros_like(p1), np.ones_like(p1)
        for look in range(_ROUNDS + 1):
            share = np.linspace(low, high, _CLOSER if look else _SCAN)
            pressure = p1 * (p2 / p1) ** share
            state = fluid.at(pressure=pressure, specific_entropy=np.broadcast_to(s1, pressure.shape), errors="mask")
            flux = state.density * np.sqrt(2.0 * np.maximum(total - state.specific_enthalpy, 0.0))
            best = np.argmax(np.nan_to_num(flux, nan=-1.0), axis=0)
            columns = np.arange(p1.size)
            largest, place = flux[best, columns], share[best, columns]
            step = share[1] - share[0]
            if look < _ROUNDS:
                low, high = np.maximum(place - step, 0.0), np.minimum(place + step, 1.0)
        # The top of the parabola through the best point and its neighbours.
        inside = (best > 0) & (best < share.shape[0] - 1)
        before, after = flux[np.maximum(best - 1, 0), columns], flux[np.minimum(best + 1, share.shape[0] - 1), columns]
        bend = before - 2.0 * largest + after
        shift = np.where(inside & (bend < 0.0), 0.5 * (before - after) / bend, 0.0)
        largest = largest - 0.25 * np.where(inside, before - after, 0.0) * shift
        lost = ~np.isfinite(flux[-1]) | ~np.isfinite(flux[0])
        pressure = p1 * (p2 / p1) ** (place + shift * step)
    return np.where(lost, np.nan, largest), np.where(lost, np.nan, pressure)


def _throat_inputs(piece: Piece) -> tuple[str, ...]:
    """Paths that the throat depends on beside the flow."""
    inlet, outlet = piece.one("inlet"), piece.one("outlet")
    fixed = tuple(f"states.{inlet}.{name}" for name in ("pressure", "specific_enthalpy", "specific_entropy"))
    fixed = (*fixed, f"states.{outlet}.pressure")
    velocity = f"states.{inlet}.velocity"
    return (*fixed, *((velocity,) if velocity in piece.carried else ()))


def throat_relation(piece: Piece) -> Formula:
    """A_t = ṁ/max(ρ V), solvable for the flow too."""
    return for_composition([piece.fluid(piece.one("inlet"))], lambda fluid: _throat_relation(piece, fluid))


def _throat_relation(piece: Piece, fluid: Any) -> Formula:
    inlet = piece.one("inlet")
    flow, area = f"states.{inlet}.mass_flow", piece.path("throat_area")
    inputs = _throat_inputs(piece)

    def flux(*arrays: Any) -> Any:
        return _largest_flux(fluid, *arrays)[0]

    arguments = r",\,".join(token(path) for path in inputs)
    largest = rf"\max\rho V\left({arguments}\right)"
    return Formula(
        piece.path("throat_area.relation"),
        piece.owner,
        "Throat",
        f"{piece.title}: the smallest area is where the flux ρ V of the isentropic flow is largest, "
        "at the speed of sound if the pressure falls so far.",
        f"continuity and energy along the isentropic path; equation of state, {fluid.title}",
        area,
        (flow, *inputs),
        lambda mass, *arrays: mass / flux(*arrays),
        rf"\frac{{{token(flow)}}}{{{largest}}}",
        {
            flow: Inverse(
                lambda throat, *arrays: throat * flux(*arrays),
                rf"{token(area)}\,{largest}",
                f"{piece.title}: the throat passes what the largest flux ρ V of the isentropic flow allows.",
            )
        },
        solvable_inputs=(flow,),
        fluids=(piece.fluid_id(inlet),),
        reason="the isentropic path leaves the range of the fluid's equation",
    )


def throat_result(piece: Piece) -> Formula:
    """Pressure at the throat [Pa]."""
    return for_composition([piece.fluid(piece.one("inlet"))], lambda fluid: _throat_result(piece, fluid))


def _throat_result(piece: Piece, fluid: Any) -> Formula:
    inlet = piece.one("inlet")
    inputs = _throat_inputs(piece)

    def pressure(*arrays: Any) -> Any:
        return _largest_flux(fluid, *arrays)[1]

    return Formula(
        piece.path("throat_pressure"),
        piece.owner,
        "Throat pressure",
        f"{piece.title}: pressure at which the flux of the isentropic flow is largest; the outlet pressure where the "
        "speed of sound is not reached.",
        f"continuity and energy along the isentropic path; equation of state, {fluid.title}",
        piece.path("throat_pressure"),
        inputs,
        pressure,
        rf"p\left({token(inputs[2])},\,\max\rho V\right)",
        fluids=(piece.fluid_id(inlet),),
        reason="the isentropic path leaves the range of the fluid's equation",
    )
