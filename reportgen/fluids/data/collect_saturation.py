"""Saturation curves for the data files, from the equations alone (run by a maintainer, through collect.py).

The critical point is where (∂p/∂ρ)_T and its minimum over density vanish. Coexisting densities satisfy equal pressure
and equal Gibbs energy (Newton's method: Akasaka, J. Therm. Sci. Technol. 3 (2008) 442, doi:10.1299/jtst.3.442), in
extended precision. Curves are fitted by Chebyshev polynomials of x = (1 − T/T_c)^(1/2), halving intervals until the
tail is small (idea: Bell and Alpert, Ind. Eng. Chem. Res. 60 (2021) 9983, doi:10.1021/acs.iecr.1c00847).

Why the square root: coexisting densities of an equation analytic at its critical point are analytic in it; a cube root
needs as many intervals (measured: 11-13 either way) and costs more to take. Closest to the critical point, from
T_c - T = 4e-6 T_c on or less, even extended precision leaves densities uncertain by 1e-9: there a polynomial joins the
curves to the critical point.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from reportgen.fluids.real.helmholtz import Helmholtz

Array = NDArray[Any]
Extended = np.longdouble

DEGREE = 14
TOLERANCE = 1e-13
DEEPEST = 10
#: Upper ends in x tried for the innermost interval, the first that keeps both phases in equilibrium within the bar
#: taken. The larger keeps the noise at its end out of the interval beyond; some curves bend too much for it.
INNER = (0.002, 0.001, 0.0007)
#: Largest difference of the Gibbs energies of both phases next to the critical point, in parts of RT.
CLOSE = 1e-12
#: Degree of the polynomial through the critical point.
ORDER = 8
#: 1 − T/T_c from which on that polynomial is fitted where it would swing.
BENT = 1.2e-7
#: Largest tail taken where intervals are no longer halved.
LOOSE = 1e-7
#: Largest tail next to the top of a pseudo-pure fluid, where published pressures go with small powers of 1 - T/T_top.
LOOSE_AT_TOP = 1e-3
#: Extended precision leaves coexisting densities uncertain by about this over θ^(3/2).
NOISE = 1e-17


@dataclass
class Critical:
    """Temperature [K], density [kg/m3], pressure [Pa]."""

    temperature: Any
    density: Any
    pressure: Any


def critical_point(equation: Helmholtz, temperature: float, density: float) -> Critical:
    """The equation's own critical point, near the stated temperature [K] and density [kg/m3]."""

    def least_slope(t: Any) -> tuple[Any, Any]:
        low, high = Extended(density) * Extended(0.8), Extended(density) * Extended(1.2)
        for _ in range(7):
            grid = np.linspace(low, high, 41, dtype=Extended)
            slope = equation.properties(np.full(41, t, dtype=Extended), grid).pressure_density
            k = int(np.clip(np.argmin(slope), 1, 39))
            low, high = grid[k - 1], grid[k + 1]
        return slope[k], grid[k]

    low, high = Extended(temperature) * Extended(0.98), Extended(temperature) * Extended(1.02)
    for _ in range(62):
        middle = (low + high) / 2
        if least_slope(middle)[0] > 0:
            high = middle
        else:
            low = middle
    rho = least_slope(high)[1]
    p = equation.properties(np.array([high]), np.array([rho])).pressure[0]
    return Critical(high, rho, p)


def coexistence(equation: Helmholtz, temperature: Array, liquid: Array, vapour: Array) -> tuple[Array, Array, Array]:
    """Coexisting densities [kg/m3] and pressure [Pa] at temperature [K] from starting densities, shape (N,)."""
    liquid, vapour = liquid.copy(), vapour.copy()
    last = np.inf
    for _ in range(60):
        a, b = equation.properties(temperature, liquid), equation.properties(temperature, vapour)
        pressure_gap = b.pressure - a.pressure
        gibbs_gap = b.enthalpy - a.enthalpy - temperature * (b.entropy - a.entropy)
        u = (pressure_gap / vapour - gibbs_gap) / (1 / vapour - 1 / liquid)
        step_l = u / a.pressure_density
        step_v = (u - pressure_gap) / b.pressure_density
        relative = np.maximum(abs(step_l / liquid), abs(step_v / vapour))
        damping = np.minimum(1, 0.2 / np.maximum(relative, 1e-30))
        liquid += damping * step_l
        vapour += damping * step_v
        largest = float(relative.max())
        if largest < 1e-17 or (largest < 1e-7 and largest >= last):
            return liquid, vapour, equation.properties(temperature, vapour).pressure
        last = largest
    raise ArithmeticError(f"no coexistence found near T = {temperature[0]} K (step {largest:.1e})")


def chebyshev(values: Array) -> Array:
    """Chebyshev coefficients of functions known at the Chebyshev nodes; last axis."""
    n = values.shape[-1]
    k = np.arange(n)
    matrix = np.cos(np.pi * np.outer(k, k + 0.5) / n).astype(Extended) * 2 / n
    matrix[0] /= 2
    coefficients: Array = values @ matrix.T
    return coefficients


def nodes(low: Any, high: Any, count: int = DEGREE + 1) -> Array:
    """Chebyshev nodes of an interval."""
    k = np.arange(count)
    place = np.cos(np.pi * (k + 0.5) / count).astype(Extended)
    middle: Array = (low + high) / 2 + (high - low) / 2 * place
    return middle


@dataclass
class Piece:
    """One interval with the coefficients of each function."""

    low: Any
    high: Any
    coefficients: Array


def fit(
    function: Callable[[Array], Array],
    low: Any,
    high: Any,
    scale: Array,
    noise: float = 0.0,
    depth: int = 0,
    *,
    loose: float = LOOSE,
) -> list[Piece]:
    """Expansions of functions (x -> shape (functions, N)), intervals halved until the tail is below the tolerance.

    At the deepest level, ``loose`` is the largest tail taken.
    """
    c = chebyshev(function(nodes(low, high)))
    tail = float(np.max(np.abs(c[:, -2:]).max(axis=1) / scale))
    if tail < TOLERANCE + noise / max(float(low), 1e-9) ** 3 or depth == DEEPEST or not np.isfinite(tail):
        if not tail < loose:
            raise ArithmeticError(f"no expansion found on {float(low)}..{float(high)}: tail {tail}")
        if depth == DEEPEST and tail > 1e-12:
            print(f"    interval {float(low):.6f}..{float(high):.6f}: tail {tail:.1e} at the deepest level")
        return [Piece(low, high, c)]
    middle = (low + high) / 2
    parts = ((low, middle), (middle, high))
    return [piece for a, b in parts for piece in fit(function, a, b, scale, noise, depth + 1, loose=loose)]


def march(
    equation: Helmholtz, critical: Critical, triple: float, liquid: float, vapour: float
) -> tuple[Array, Array, Array]:
    """x, ln ρ_L, ln ρ_V from the triple point upwards, each step started from the ones before; ascending x."""
    largest = 1 - Extended(triple) / critical.temperature
    theta = np.concatenate([np.linspace(float(largest), 0.02, 80), np.geomspace(0.02, 1e-7, 160)[1:]]).astype(Extended)
    x = np.sqrt(theta)
    logs = np.zeros((2, theta.size), dtype=Extended)
    for i in range(theta.size):
        if i == 0:
            start = np.log(np.array([liquid, vapour], dtype=Extended))
        elif i == 1:
            start = logs[:, 0]
        else:
            start = logs[:, i - 1] + (logs[:, i - 1] - logs[:, i - 2]) * (x[i] - x[i - 1]) / (x[i - 1] - x[i - 2])
        t = np.array([critical.temperature * (1 - theta[i])])
        rho_l, rho_v, _ = coexistence(equation, t, np.exp(start[:1]), np.exp(start[1:]))
        logs[:, i] = np.log(rho_l[0]), np.log(rho_v[0])
    return x[::-1], logs[0, ::-1], logs[1, ::-1]


def pure_curves(equation: Helmholtz, critical: Critical, triple: float, liquid: float, vapour: float) -> list[Piece]:
    """ln p, ρ_L, ln ρ_V as functions of x from the critical to the triple point.

    ``liquid`` and ``vapour`` are densities [kg/m3] near those at the triple point [K].
    """
    seeds = [np.asarray(a, dtype=float) for a in march(equation, critical, triple, liquid, vapour)]

    def solve(x: Array) -> Array:
        start = np.asarray(x, dtype=float)
        rho_l, rho_v, p = coexistence(
            equation,
            critical.temperature * (1 - x * x),
            np.exp(np.interp(start, seeds[0], seeds[1])).astype(Extended),
            np.exp(np.interp(start, seeds[0], seeds[2])).astype(Extended),
        )
        return np.array([np.log(p), rho_l, np.log(rho_v)])

    outer = np.sqrt(1 - Extended(triple) / critical.temperature)
    scale = np.array([1.0, float(critical.density), 1.0])
    tried: list[tuple[float, list[Piece]]] = []
    for end in INNER:
        try:
            pieces = [*_join(solve, critical, Extended(end)), *fit(solve, Extended(end), outer, scale, NOISE)]
        except ArithmeticError:
            continue  # so close to critical that noise is above what an expansion is let have
        tried.append((_gibbs_gap(equation, critical, pieces), pieces))
        if tried[-1][0] < CLOSE:
            break
    return min(tried, key=lambda pair: pair[0])[1]


def _join(solve: Callable[[Array], Array], critical: Critical, end: Any) -> list[Piece]:
    """The innermost interval: least squares from 1e-7 T_c below critical on, through the critical point.

    Where the slope ∂p/∂ρ has a second minimum beside the critical one (chlorine), the liquid line bends within that
    distance and such a polynomial swings: then it is fitted from a little further away, and a parabola joins it.
    """
    ends = np.array([np.log(critical.pressure), critical.density, np.log(critical.density)])
    at = np.linspace(np.sqrt(1e-7), float(end), 60).astype(Extended)
    rises = np.asarray(solve(at) - ends[:, None], dtype=float).T
    span = nodes(Extended(0), end)
    powers = np.array([(at / end) ** k for k in range(1, ORDER + 1)], dtype=float).T
    found = np.linalg.lstsq(powers, rises, rcond=None)[0].astype(Extended)
    values = ends[:, None] + sum(found[k - 1][:, None] * (span / end) ** k for k in range(1, ORDER + 1))
    piece = Piece(Extended(0), end, chebyshev(values))
    if _falls_apart([piece], end):
        return [piece]
    outer = at[at > np.sqrt(BENT)]
    start = outer[0]
    fitted = np.polynomial.chebyshev.chebfit(
        (2 * outer - start - end).astype(float) / float(end - start), rises[at > np.sqrt(BENT)], ORDER
    )
    coefficients = np.zeros((3, DEGREE + 1), dtype=Extended)
    coefficients[:, : ORDER + 1] = fitted.T
    coefficients[:, 0] += ends
    beyond = Piece(start, end, coefficients)
    step = (end - start) * Extended(1e-4)
    two = np.array([start, start + step])
    height, next_height = np.array([evaluate_pieces([beyond], k, two) - ends[k] for k in range(3)]).T
    slope = (next_height - height) / step
    curved = (slope * start - height) / start**2
    straight = 2 * height / start - slope
    inside = nodes(Extended(0), start)
    parabola = ends[:, None] + straight[:, None] * inside + curved[:, None] * inside**2
    return [Piece(Extended(0), start, chebyshev(parabola)), beyond]


def _falls_apart(pieces: list[Piece], end: Any) -> bool:
    """Whether pressure and vapour density fall, and liquid density rises, all the way from the critical point."""
    x = np.linspace(0.0, 1.0, 400).astype(Extended) * end
    log_pressure, liquid, log_vapour = (np.diff(evaluate_pieces(pieces, k, x)) for k in range(3))
    return bool((liquid > 0).all() and (log_vapour < 0).all() and (log_pressure < 0).all())


def _gibbs_gap(equation: Helmholtz, critical: Critical, pieces: list[Piece]) -> float:
    """Largest difference of the Gibbs energies of both phases from 1e-7 to 1e-3 T_c below critical, in parts of RT."""
    x = np.sqrt(np.geomspace(1e-7, 1e-3, 120)).astype(Extended)
    temperature = critical.temperature * (1 - x * x)
    liquid = equation.properties(temperature, evaluate_pieces(pieces, 1, x))
    vapour = equation.properties(temperature, np.exp(evaluate_pieces(pieces, 2, x)))
    gap = liquid.enthalpy - vapour.enthalpy - temperature * (liquid.entropy - vapour.entropy)
    return float(np.abs(gap / (equation.gas_constant * temperature)).max())


def pseudo_pure_curves(
    equation: Helmholtz,
    top: float,
    lowest: float,
    bubble: Callable[[Array], Array],
    dew: Callable[[Array], Array],
    liquid: float,
    vapour: float,
) -> list[Piece]:
    """ln p_bubble, ρ_L, ln ρ_V, ln p_dew as functions of x = (1 − T/T_top)^(1/2).

    ``bubble`` and ``dew`` give the published pressures [Pa] of T [K], which meet at T_top [K]; ``liquid`` and
    ``vapour`` are densities near those at the lowest temperature.
    """

    def solve(x: Array) -> Array:
        t = Extended(top) * (1 - x * x)
        return _on_lines(equation, t, np.log(bubble(t)), np.log(dew(t)), liquid, vapour)

    outer = np.sqrt(1 - Extended(lowest) / top)
    scale = np.array([1.0, equation.reducing_density, 1.0, 1.0])
    return fit(solve, Extended(0), outer, scale, loose=LOOSE_AT_TOP)


def joined_curves(
    equation: Helmholtz,
    critical: Critical,
    lowest: float,
    bubble: Callable[[Array], Array],
    dew: Callable[[Array], Array],
    liquid: float,
    vapour: float,
    join: tuple[float, float],
) -> list[Piece]:
    """The same where the published lines leave the stable branches of the equation near the top.

    ``join`` are two values of 1 − T/T_c, T_c the equation's own critical temperature: beyond the larger one the lines
    are the published ones, below the smaller one they are one line, that of equal pressure and Gibbs energy, which ends
    in the critical point. Between them ln p goes from one to the other with a weight smooth to the second derivative.
    """
    pure = pure_curves(equation, critical, lowest, liquid, vapour)
    far, near = (np.sqrt(Extended(theta)) for theta in join)

    def solve(x: Array) -> Array:
        t = critical.temperature * (1 - x * x)
        place = np.clip((x - near) / (far - near), 0, 1)
        weight = place**3 * (10 - 15 * place + 6 * place * place)
        alone = evaluate_pieces(pure, 0, x)
        log_bubble, log_dew = (weight * np.log(line(t)) + (1 - weight) * alone for line in (bubble, dew))
        return _on_lines(equation, t, log_bubble, log_dew, liquid, vapour)

    inner = []
    for piece in pure:
        if piece.low < near:
            inner.append(_cut(piece, near) if piece.high > near else piece)
    inner = [Piece(p.low, p.high, np.vstack([p.coefficients, p.coefficients[:1]])) for p in inner]
    outer = np.sqrt(1 - Extended(lowest) / critical.temperature)
    scale = np.array([1.0, float(critical.density), 1.0, 1.0])
    return inner + fit(solve, near, far, scale) + fit(solve, far, outer, scale)


def _cut(piece: Piece, high: Any) -> Piece:
    """The same functions on the part of an interval up to ``high``: exact, since they are polynomials."""
    x = nodes(piece.low, high, piece.coefficients.shape[1])
    rows = [evaluate_pieces([piece], row, x) for row in range(piece.coefficients.shape[0])]
    return Piece(piece.low, high, chebyshev(np.array(rows)))


def _on_lines(
    equation: Helmholtz, temperature: Array, log_bubble: Array, log_dew: Array, liquid: float, vapour: float
) -> Array:
    """ln p_bubble, ρ_L, ln ρ_V, ln p_dew at temperature [K], shape (4, N), from ln p [Pa] of both lines."""
    rho_l, rho_v = np.array(
        [
            (
                _branch_density(equation, t, a, 1.05 * liquid, 0.3 * liquid),
                _branch_density(equation, t, b, 0.1 * vapour, 0.4 * liquid),
            )
            for t, a, b in zip(temperature, np.exp(log_bubble), np.exp(log_dew), strict=True)
        ]
    ).T
    return np.array([log_bubble, rho_l, np.log(rho_v), log_dew])


def _branch_density(equation: Helmholtz, temperature: Any, pressure: Any, outer: float, inner: float) -> Any:
    """The root of p(T, ρ) = p nearest to ``outer`` [kg/m3] on the way to ``inner``, by scanning and bisection."""
    grid = np.geomspace(outer, inner, 400).astype(Extended)
    gap = equation.properties(np.full(grid.size, temperature), grid).pressure - pressure
    k = int(np.flatnonzero(np.sign(gap) != np.sign(gap[0]))[0])
    low, high, sign = grid[k - 1], grid[k], np.sign(gap[k - 1])
    t = np.array([temperature])
    for _ in range(70):
        middle = np.array([(low + high) / 2])
        same = np.sign(equation.properties(t, middle).pressure[0] - pressure) == sign
        low, high = (middle[0], high) if same else (low, middle[0])
    return (low + high) / 2


def evaluate_pieces(pieces: list[Piece], function: int, x: Array) -> Array:
    """One of the fitted functions at x; beyond the ends, its value at the end."""
    result = np.zeros(x.shape, dtype=Extended)
    for index, piece in enumerate(pieces):
        inside = (x > piece.low) | (index == 0)
        place = np.clip((2 * x[inside] - piece.low - piece.high) / (piece.high - piece.low), -1, 1)
        order = np.arange(piece.coefficients.shape[1])[:, None]
        result[inside] = piece.coefficients[function] @ np.cos(order * np.arccos(place))
    return result


def outermost_crossing(pieces: list[Piece], function: int, log_top: Any) -> float:
    """The largest x at which a pressure curve still reaches the pressure at x = 0: zero unless it first rises."""
    x = np.linspace(0, float(pieces[-1].high), 4001).astype(Extended)[1:]
    above = np.flatnonzero(evaluate_pieces(pieces, function, x) > log_top)
    if above.size == 0:
        return 0.0
    low, high = x[above[-1]], x[above[-1] + 1]
    for _ in range(66):
        middle = (low + high) / 2
        if evaluate_pieces(pieces, function, np.array([middle]))[0] > log_top:
            low = middle
        else:
            high = middle
    return float(low)


def inverse(pieces: list[Piece], function: int, log_top: Any, start: Any, *, loose: float = LOOSE) -> list[Piece]:
    """x as a function of y = (ln(p_top/p))^(1/2), by bisection in the fitted pressure, from ``start`` outwards."""
    outer = pieces[-1].high
    deepest = np.sqrt(log_top - evaluate_pieces(pieces, function, np.array([outer]))[0])

    def solve(y: Array) -> Array:
        target = log_top - y * y
        low, high = np.full_like(y, start), np.full_like(y, outer)
        for _ in range(66):
            middle = (low + high) / 2
            above = evaluate_pieces(pieces, function, middle) > target
            low, high = np.where(above, middle, low), np.where(above, high, middle)
        return np.array([(low + high) / 2])

    scale = np.array([1.0])
    if start > 0 or loose > LOOSE:  # a pseudo-pure fluid
        return fit(solve, Extended(0), deepest, scale, loose=loose)
    # the innermost interval of the pressure joins the next one with a kink in its rounding: an end here too
    inner = np.sqrt(log_top - evaluate_pieces(pieces, function, np.array([pieces[0].high]))[0])
    parts = ((Extended(0), inner), (inner, deepest))
    return [piece for a, b in parts for piece in fit(solve, a, b, scale, loose=loose)]


def as_data(pieces: list[Piece], names: tuple[str, ...]) -> dict[str, Any]:
    """Edges and coefficients for the data file."""
    result: dict[str, Any] = {"edges": [float(pieces[0].low), *(float(piece.high) for piece in pieces)]}
    for row, name in enumerate(names):
        result[name] = [[float(c) for c in piece.coefficients[row]] for piece in pieces]
    return result
