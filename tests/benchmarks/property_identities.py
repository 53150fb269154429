"""Thermodynamic identities of every property model, by differences of eighth order through the public interface:
``python -m tests.benchmarks.property_identities``.

Each derivative is taken with several steps, each half of the one before; the one that agrees best with the next is
used. Its uncertainty is that difference and the rounding of the values, found without looking at the identity. What
stays above 1e-9 within ten such uncertainties is counted as *not resolved* in double precision, anything above is a
violation. Residuals are in parts of the larger term of the identity:

    (∂u/∂s)_v = T           of T                      (∂h/∂s)_p = T              of T
    (∂u/∂v)_s = −p          of p or T (∂p/∂T)_v       (∂h/∂p)_s = v              of v
    (∂s/∂v)_T = (∂p/∂T)_v   of that or ρR             (∂s/∂p)_T = −(∂v/∂T)_p     of that or v/T
    c_v = (∂u/∂T)_v         of c_v                    (∂T/∂p)_s = (∂v/∂s)_p      of that or v/c_p
    c_p = (∂h/∂T)_p         of c_p                    w² = −v² (∂p/∂v)_s         of w²

Saturation: equal Gibbs energy of both phases (in parts of R·T), the pressure of each by the equation (of the vapour in
parts of itself, of the liquid in parts of ρRT) and, from 1e-3 Tc below critical, Clapeyron's dp/dT = Δs/Δv.
"""

from __future__ import annotations

import argparse
import time
from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from reportgen.fluids import cubic, ideal_gas, ideal_gas_names, incompressible, names, real_fluid, statistical

__all__ = [
    "BAR",
    "Result",
    "check",
    "check_model",
    "check_saturation",
    "check_statistical",
    "derivatives",
    "main",
    "models",
    "states",
]

Array = NDArray[Any]

BAR = 1e-9
#: Residuals up to this many uncertainties of the differences are not resolved.
_UNCERTAINTIES = 10.0
#: First step, relative to the scale of the variable, and number of halvings.
_FIRST_STEP = 2.0**-5
_HALVINGS = 9
#: Steps that must stay within the range of a model, and within one phase.
_LEAST_STEPS = 4
#: Relative rounding of a property: a sum of some dozens of terms.
_ROUNDING = 2e-15
_OFFSETS = np.array([-4, -3, -2, -1, 1, 2, 3, 4])
_WEIGHTS = np.array([1 / 280, -4 / 105, 1 / 5, -4 / 5, 4 / 5, -1 / 5, 4 / 105, -1 / 280])
#: Weights that leave nothing of a polynomial of sixth degree on these points, scaled to pass rounding on as it is.
_NOISE = np.array([1 / np.prod([float(a - b) for b in _OFFSETS if b != a]) for a in _OFFSETS])
_NOISE /= np.sqrt(np.sum(_NOISE**2))


@dataclass
class Result:
    """One identity of one model: states, worst residual of the resolved ones, those not resolved and their worst,
    violations with the first state that shows one.
    """

    states: int = 0
    worst: float = 0.0
    unresolved: int = 0
    worst_unresolved: float = 0.0
    violations: int = 0
    sample: str = ""

    def add(self, other: Result) -> None:
        """Another model's."""
        self.states += other.states
        self.worst = max(self.worst, other.worst)
        self.unresolved += other.unresolved
        self.worst_unresolved = max(self.worst_unresolved, other.worst_unresolved)
        self.violations += other.violations
        self.sample = self.sample or other.sample

    def __str__(self) -> str:
        text = f"{self.states:6d} states, worst {self.worst:7.1e}"
        if self.unresolved:
            text += f", not resolved {self.unresolved} (up to {self.worst_unresolved:.0e})"
        return text + (f", VIOLATIONS {self.violations}: {self.sample}" if self.violations else "")


#: 1 − T/Tc above which Clapeyron's equation is checked: equal g to 1e-9 leaves the slope open by 1e-9/(1 − T/Tc).
_CLAPEYRON = 1e-3
#: The identity that loses the more digits the nearer to critical.
CLAPEYRON = "dp/dT = (s''-s')/(v''-v')"
#: Compositions of the cubic equations, and incompressible substances, of our own choosing.
CUBICS: dict[str, tuple[Any, dict[str, Any]]] = {
    "CO2": ("CO2", {}),
    "propane, translated": ("propane", {"volume_translation": "Peneloux"}),
    "N2": ("N2", {}),
    "H2O": ("H2O", {}),
    "natural gas": ({"CH4": 0.8, "C2H6": 0.15, "CO2": 0.05}, {"interaction": {("CH4", "CO2"): 0.1}}),
    "N2 + CO2": ({"N2": 0.7, "CO2": 0.3}, {}),
}
INCOMPRESSIBLES: dict[str, dict[str, Any]] = {
    "constant": {"density": 998.0, "specific_heat": 4182.0, "limits": (273.16, 373.0)},
    "solid": {"density": 8930.0, "specific_heat": 385.0, "phase": "solid", "limits": (200.0, 900.0)},
    "polynomial": {"density": 850.0, "specific_heat": (1100.0, 2.4, 1e-3), "limits": (250.0, 600.0)},
    "table": {"density": 1060.0, "specific_heat": ([260.0, 300.0, 350.0, 420.0], [3300.0, 3420.0, 3600.0, 3900.0])},
    "expanding": {
        "density": 850.0,
        "specific_heat": (1100.0, 2.4),
        "limits": (250.0, 600.0),
        "thermal_expansion": 8e-4,
    },
}

Derivatives = dict[str, tuple[Array, Array]]


def derivatives(evaluate: Callable[[Array], Mapping[str, Array]], point: Array, scale: Array) -> Derivatives:
    """First derivatives of several functions with their uncertainties, by central differences of eighth order.

    Parameters
    ----------
    evaluate : x of shape (N, K, 8) -> functions of it, same shape; NaN where a step leaves their range.
    point, scale : where, and the length over which the functions may change much; shape (N,).

    Returns
    -------
    name -> derivative and uncertainty, shape (N,); NaN next to an end of the range, where too few steps stay within.
    """
    # powers of two, so that x itself is not rounded
    steps = 2.0 ** (np.floor(np.log2(scale * _FIRST_STEP))[:, None] - np.arange(_HALVINGS))
    x = point[:, None, None] + steps[:, :, None] * _OFFSETS
    found = {}
    rows = np.arange(point.size)
    for name, values in evaluate(x).items():
        slope = np.sum(values * _WEIGHTS, axis=2) / steps
        apart = np.abs(np.diff(slope, axis=1))
        # what is left of eight values after a polynomial of sixth degree, at the smaller steps
        scatter = np.abs(values @ _NOISE)[:, _HALVINGS // 2 :]
        noise = np.nan_to_num(np.nanmedian(np.where(np.isnan(scatter).all(axis=1)[:, None], 0.0, scatter), axis=1))
        rounding = np.maximum(_ROUNDING * np.max(np.abs(values), axis=2)[:, 1:], noise[:, None]) / steps[:, 1:]
        # noise can agree by chance, even exactly
        doubt = np.where(np.isnan(apart), np.inf, apart + rounding)
        best = np.argmin(doubt, axis=1)
        known = np.count_nonzero(np.isfinite(doubt), axis=1) >= _LEAST_STEPS
        found[name] = np.where(known, slope[rows, best + 1], np.nan), np.where(known, doubt[rows, best], np.nan)
    return found


def _evaluation(fluid: Any, first: str, second: str, held: Array, fields: tuple[str, ...]) -> Any:
    """Function of ``first`` at a held ``second``: fields of single-phase states, NaN elsewhere."""

    def evaluate(x: Array) -> dict[str, Array]:
        state = fluid.at(**{first: x, second: np.broadcast_to(held[:, None, None], x.shape)}, errors="mask")
        left = np.isfinite(state.quality)
        # given pressure and temperature, a boiling line is crossed without two phases ever showing
        left |= ((state.phase == "liquid").any(axis=-1) & (state.phase == "vapour").any(axis=-1))[..., None]
        return {field: np.where(left, np.nan, getattr(state, field)) for field in fields}

    return evaluate


def _result(
    name: str, residual: Array, uncertainty: Array, state: Any, results: dict[str, Result], bar: float = BAR
) -> None:
    """Count one identity: residual and uncertainty in parts of its scale."""
    known = np.isfinite(residual)
    small = known & (residual <= bar)
    unclear = known & ~small & (residual <= _UNCERTAINTIES * uncertainty)
    bad = np.flatnonzero(known & ~small & ~unclear)
    result = Result(int(known.sum()), float(residual[small].max(initial=0.0)), int(unclear.sum()))
    result.worst_unresolved = float(residual[unclear].max(initial=0.0))
    result.violations = int(bad.size)
    if bad.size:
        worst = bad[np.argmax(residual[bad])]
        result.worst = float(residual[worst])
        result.sample = (
            f"{residual[worst]:.1e} (uncertain by {uncertainty[worst]:.0e}) at "
            f"T = {float(state.temperature[worst])!r}, p = {float(state.pressure[worst])!r}, "
            f"rho = {float(state.density[worst])!r}"
        )
    results.setdefault(name, Result()).add(result)


def check_model(fluid: Any, pressure: Array, temperature: Array) -> dict[str, Result]:
    """All identities at single-phase states of one model; those of pairs it does not carry are left out.

    Parameters
    ----------
    fluid : any model. pressure, temperature : p [Pa] and T [K], shape (N,); what the model refuses is dropped.
    """
    state = fluid.at(pressure=pressure, temperature=temperature, errors="mask")
    good = np.isfinite(state.density) & ~np.isfinite(state.quality)
    pressure, temperature = pressure[good], temperature[good]
    state = fluid.at(pressure=pressure, temperature=temperature)
    results: dict[str, Result] = {}
    if fluid.kind != "incompressible":
        _by_temperature_and_density(fluid, state, results)
    _by_pressure(fluid, state, results)
    return results


def _by_temperature_and_density(fluid: Any, state: Any, results: dict[str, Result]) -> None:
    t, rho = state.temperature, state.density
    gas_constant = fluid.gas_constant
    fields = ("specific_internal_energy", "specific_entropy", "pressure")
    heated = derivatives(_evaluation(fluid, "temperature", "density", rho, fields), t, t)
    spread = derivatives(_evaluation(fluid, "density", "temperature", t, fields), rho, rho)
    u_t, s_t, p_t = (heated[field] for field in fields)
    u_v, s_v, _ = ((-(rho**2) * value, rho**2 * error) for value, error in (spread[field] for field in fields))
    with np.errstate(invalid="ignore", divide="ignore"):
        ratio = u_t[0] / s_t[0]
        relative = u_t[1] / np.abs(u_t[0]) + s_t[1] / np.abs(s_t[0])
        _result("(du/ds)_v = T", np.abs(ratio / t - 1), relative, state, results)
        scale = np.maximum(np.abs(state.pressure), t * np.abs(p_t[0]))
        along = u_v[0] - ratio * s_v[0]
        error = u_v[1] + t * s_v[1] + np.abs(ratio * s_v[0]) * relative
        _result("(du/dv)_s = -p", np.abs(along + state.pressure) / scale, error / scale, state, results)
        scale = np.maximum(np.abs(p_t[0]), rho * gas_constant)
        _result("(ds/dv)_T = (dp/dT)_v", np.abs(s_v[0] - p_t[0]) / scale, (s_v[1] + p_t[1]) / scale, state, results)
        cv = state.isochoric_heat_capacity
        _result("c_v = (du/dT)_v", np.abs(u_t[0] / cv - 1), u_t[1] / cv, state, results)


def _by_pressure(fluid: Any, state: Any, results: dict[str, Result]) -> None:
    t, p, s = state.temperature, state.pressure, state.specific_entropy
    v, cp = state.specific_volume, state.isobaric_heat_capacity
    stiffness = state.density * state.speed_of_sound**2
    # a liquid may go down to its saturation pressure only
    reach = np.minimum(np.where(np.isfinite(stiffness), stiffness, np.inf), 5 * p)
    fields = ("specific_enthalpy", "specific_entropy", "specific_volume", "temperature")
    if fluid.kind == "incompressible" and not fluid.thermal_expansion:
        energy = "specific_internal_energy"
        warmed = derivatives(_evaluation(fluid, "temperature", "pressure", p, (energy, "specific_entropy")), t, t)
        (u_t, u_error), (s_t, s_error) = warmed[energy], warmed["specific_entropy"]
        _result("(du/ds)_v = T", np.abs(u_t / s_t / t - 1), u_error / u_t + s_error / s_t, state, results)
    heated = derivatives(_evaluation(fluid, "temperature", "pressure", p, fields), t, t)
    pressed = derivatives(_evaluation(fluid, "pressure", "temperature", t, fields), p, reach)
    h_t, s_t, v_t, _ = (heated[field] for field in fields)
    s_p = pressed["specific_entropy"]
    with np.errstate(invalid="ignore", divide="ignore"):
        relative = h_t[1] / np.abs(h_t[0]) + s_t[1] / np.abs(s_t[0])
        _result("(dh/ds)_p = T", np.abs(h_t[0] / s_t[0] / t - 1), relative, state, results)
        scale = np.maximum(np.abs(v_t[0]), v / t)
        _result("(ds/dp)_T = -(dv/dT)_p", np.abs(s_p[0] + v_t[0]) / scale, (s_p[1] + v_t[1]) / scale, state, results)
        _result("c_p = (dh/dT)_p", np.abs(h_t[0] / cp - 1), h_t[1] / cp, state, results)
        squeezed = derivatives(_evaluation(fluid, "pressure", "specific_entropy", s, fields), p, reach)
        stirred = derivatives(_evaluation(fluid, "specific_entropy", "pressure", p, fields), s, cp)
        h_p, _, v_p, t_p = (squeezed[field] for field in fields)
        v_s = stirred["specific_volume"]
        _result("(dh/dp)_s = v", np.abs(h_p[0] / v - 1), h_p[1] / v, state, results)
        scale = np.maximum(np.abs(t_p[0]), v / cp)
        _result("(dT/dp)_s = (dv/ds)_p", np.abs(t_p[0] - v_s[0]) / scale, (t_p[1] + v_s[1]) / scale, state, results)
        if np.isfinite(stiffness).any():
            squared = -(v**2) / v_p[0]
            w2 = state.speed_of_sound**2
            _result("w^2 = -v^2 (dp/dv)_s", np.abs(squared / w2 - 1), v_p[1] / np.abs(v_p[0]), state, results)


def check_saturation(fluid: Any, count: int = 200) -> dict[str, Result]:
    """Both phases of a pure fluid in equilibrium, from the triple point to 1e-6 Tc below critical.

    Half of the temperatures are even in T, half in ln(1 − T/Tc). The pressures of a real fluid come from its equation
    of state, since ``at`` gives a saturated state the saturation pressure. A cubic equation, whose range has no triple
    point, is followed from 0.5 Tc.
    """
    critical = fluid.limits.critical_point
    assert critical is not None
    real = fluid.kind == "real-fluid"
    lowest = max(fluid.limits.minimum_temperature, 0.0 if real else 0.5 * critical.temperature)
    gap = np.geomspace(1e-6, 1 - lowest / critical.temperature, count // 2)
    t = np.sort(
        np.concatenate([critical.temperature * (1 - gap), np.linspace(lowest, critical.temperature, count // 2, False)])
    )
    liquid, vapour = fluid.saturation(temperature=t)
    rt = fluid.gas_constant * t
    h, s, v = (
        getattr(vapour, field) - getattr(liquid, field)
        for field in ("specific_enthalpy", "specific_entropy", "specific_volume")
    )
    none = np.zeros_like(t)
    results: dict[str, Result] = {}
    _result("g' = g''", np.abs(h - t * s) / rt, none, vapour, results)
    # next to the critical point the densities are rounded by ε RT/(∂p/∂ρ)_T, which turns the chord of s over v
    turned = none
    if real:
        for phase in (liquid, vapour):
            found = fluid._equation.properties(t, phase.density)
            which, scale = ("'", phase.density * rt) if phase is liquid else ("''", phase.pressure)
            _result(f"p(T, rho{which}) = p_sat", np.abs(found.pressure - phase.pressure) / scale, none, phase, results)
            rounded = _ROUNDING * rt / np.abs(found.pressure_density) * phase.specific_volume
            turned = turned + np.abs(found.pressure_temperature * v / s - 1) * rounded / np.abs(v)

    def logarithm(x: Array) -> dict[str, Array]:
        return {"p": np.log(fluid.saturation(temperature=x, errors="mask")[0].pressure)}

    reach = np.where(
        critical.temperature - t < _CLAPEYRON * critical.temperature, np.nan, 8 * (critical.temperature - t)
    )
    slope, error = derivatives(logarithm, t, np.minimum(t, reach))["p"]
    with np.errstate(invalid="ignore", divide="ignore"):
        chord = s / v
        error = error / slope + _ROUNDING * fluid.gas_constant / s + turned
        _result(CLAPEYRON, np.abs(slope * vapour.pressure / chord - 1), error, vapour, results)
    return results


def check_statistical(gas: Any, temperature: Array) -> dict[str, Result]:
    """dH/dT = c_p and dS/dT = c_p/T of a gas from molecular constants, at T [K] of shape (N,)."""

    def evaluate(x: Array) -> dict[str, Array]:
        return {"H": gas.enthalpy(x), "S": gas.entropy(x, 1e5)}

    found = derivatives(evaluate, temperature, temperature)
    cp = gas.heat_capacity(temperature)
    results: dict[str, Result] = {}
    state = _Point(temperature)
    _result("dH/dT = c_p", np.abs(found["H"][0] / cp - 1), found["H"][1] / cp, state, results)
    _result(
        "dS/dT = c_p/T", np.abs(found["S"][0] * temperature / cp - 1), found["S"][1] * temperature / cp, state, results
    )
    return results


class _Point:
    """Temperatures at 1 bar, as the report of a violation names them."""

    def __init__(self, temperature: Array) -> None:
        self.temperature = temperature
        self.pressure = np.full_like(temperature, 1e5)
        self.density = np.full_like(temperature, np.nan)


def states(fluid: Any, count: int, seed: int) -> tuple[Array, Array]:
    """Pressures and temperatures over the range of a model: half up to 1.3 Tc, p log-uniform from 100 Pa."""
    random = np.random.default_rng(seed)
    limits = fluid.limits
    low, high = limits.minimum_temperature, limits.maximum_temperature
    near = high if limits.critical_point is None else min(1.3 * limits.critical_point.temperature, high)
    half = count // 2
    temperature = np.concatenate([low * (high / low) ** random.uniform(size=half), random.uniform(low, near, half)])
    highest = min(limits.maximum_pressure, 1e8) if fluid.kind != "cubic" else 3e7
    return np.exp(random.uniform(np.log(100.0), np.log(highest), 2 * half)), temperature


def models(chosen: str = "") -> Iterator[tuple[str, str, Any]]:
    """(kind, name, model) of every model carried, or of the kind chosen."""
    if chosen in ("", "real"):
        for name in names():
            yield "real", name, real_fluid(name)
    if chosen in ("", "cubic"):
        for equation in ("Peng-Robinson", "Soave-Redlich-Kwong"):
            for name, (composition, options) in CUBICS.items():
                yield "cubic", f"{name}, {equation}", cubic(composition, equation=equation, **options)
    if chosen in ("", "incompressible"):
        for name, given in INCOMPRESSIBLES.items():
            yield "incompressible", name, incompressible(name, **given)
    if chosen in ("", "statistical"):
        for name in statistical.names():
            yield "statistical", name, statistical.gas(name)
    if chosen in ("", "ideal"):
        for name in ideal_gas_names():
            yield "ideal", name, ideal_gas(name)
        yield "ideal", "air by composition", ideal_gas({"N2": 0.7808, "O2": 0.2095, "Ar": 0.0097})
        yield "ideal", "flue gas", ideal_gas({"N2": 0.72, "CO2": 0.1, "H2O": 0.13, "O2": 0.05})


def main() -> int:
    """Print the worst residual of each identity and kind of model; the exit status is 1 when any is violated."""
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    parser.add_argument("--states", type=int, default=60, help="states a model (60)")
    parser.add_argument("--kind", default="", help="real, ideal, cubic, incompressible or statistical (all)")
    parser.add_argument("--full", action="store_true", help="one table a model")
    chosen = parser.parse_args()
    totals: dict[str, dict[str, Result]] = {}
    counted: dict[str, int] = {}
    start = time.perf_counter()
    for kind, name, model in models(chosen.kind):
        results = check(kind, model, chosen.states)
        counted[kind] = counted.get(kind, 0) + 1
        for identity, result in results.items():
            totals.setdefault(kind, {}).setdefault(identity, Result()).add(result)
            if chosen.full or result.violations:
                print(f"  {name[:24]:24s} {identity:26s} {result}")
    for kind, results in totals.items():
        print(f"{kind}: {counted[kind]} models")
        for identity, result in results.items():
            print(f"  {identity:26s} {result}")
    print(f"{time.perf_counter() - start:.0f} s")
    return int(any(result.violations for results in totals.values() for result in results.values()))


def check(kind: str, model: Any, count: int) -> dict[str, Result]:
    """All identities of one model of a kind at ``count`` states (saturation: at 100 temperatures or more)."""
    if kind == "statistical":
        low, high = 1.15 * model.minimum_temperature, model.maximum_temperature / 1.15
        return check_statistical(model, np.geomspace(low, high, count))
    results = check_model(model, *states(model, count, seed=3))
    if (kind == "real" and not model.pseudo_pure) or (kind == "cubic" and model.composition is None):
        results |= check_saturation(model, max(count, 100))
    return results


if __name__ == "__main__":
    raise SystemExit(main())
