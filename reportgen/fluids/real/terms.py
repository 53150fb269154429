"""Registry of the kinds of terms that occur in published equations, by the names used in the data files.

A new kind of separable term is one function here: it turns the columns of a data file into products n·F(δ)·G(τ).
"""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping
from typing import Any, NamedTuple

from reportgen.fluids.real.factors import Factor

__all__ = ["IDEAL_KINDS", "NON_ANALYTIC", "RESIDUAL_KINDS", "IdealSum", "Product", "ideal_sum", "residual_products"]

Columns = Mapping[str, Any]

#: The one kind that is not a product of factors; see nonanalytic.py.
NON_ANALYTIC = "non-analytic"


class Product(NamedTuple):
    """One term n·F(δ)·G(τ)."""

    coefficient: float
    density_factor: Factor
    temperature_factor: Factor


def _power(term: Columns) -> list[Product]:
    """``n δ^d τ^t exp(−δ^l)``, the exponential only where l > 0."""
    return [
        Product(n, Factor(d, rate=1.0, power=power) if power else Factor(d), Factor(t))
        for n, d, t, power in zip(term["n"], term["d"], term["t"], term["l"], strict=True)
    ]


def _exponential(term: Columns) -> list[Product]:
    """``n δ^d τ^t exp(−g δ^l)``."""
    return [
        Product(n, Factor(d, rate=g, power=power) if g else Factor(d), Factor(t))
        for n, d, t, g, power in zip(term["n"], term["d"], term["t"], term["g"], term["l"], strict=True)
    ]


def _gaussian(term: Columns) -> list[Product]:
    """``n δ^d τ^t exp[−η(δ−ε)² − β(τ−γ)²]``."""
    columns = (term[name] for name in ("n", "d", "t", "eta", "epsilon", "beta", "gamma"))
    return [
        Product(
            n,
            Factor(d, width=eta, centre=epsilon) if eta else Factor(d),
            Factor(t, width=beta, centre=gamma) if beta else Factor(t),
        )
        for n, d, t, eta, epsilon, beta, gamma in zip(*columns, strict=True)
    ]


def _gao_b(term: Columns) -> list[Product]:
    """``n δ^d τ^t exp[1/(b + β(τ−γ)²) + η(δ−ε)²]``; η is negative in the source."""
    columns = (term[name] for name in ("n", "d", "t", "eta", "epsilon", "beta", "gamma", "b"))
    return [
        Product(n, Factor(d, width=-eta, centre=epsilon), Factor(t, centre=gamma, offset=b, slope=beta))
        for n, d, t, eta, epsilon, beta, gamma, b in zip(*columns, strict=True)
    ]


def _lemmon_2005(term: Columns) -> list[Product]:
    """``n δ^d τ^t exp(−δ^l − τ^m)``, each piece only where its exponent is not zero."""
    return [
        Product(
            n,
            Factor(d, rate=1.0, power=power) if power else Factor(d),
            Factor(t, rate=1.0, power=m) if m else Factor(t),
        )
        for n, d, t, power, m in zip(term["n"], term["d"], term["t"], term["l"], term["m"], strict=True)
    ]


def _double_exponential(term: Columns) -> list[Product]:
    """``n δ^d τ^t exp(−g_δ δ^l_δ − g_τ τ^l_τ)``."""
    names = ("n", "d", "t", "density_rate", "density_power", "temperature_rate", "temperature_power")
    return [
        Product(n, Factor(d, rate=g_d, power=l_d), Factor(t, rate=g_t, power=l_t))
        for n, d, t, g_d, l_d, g_t, l_t in zip(*(term[name] for name in names), strict=True)
    ]


#: Separable kinds of residual terms.
RESIDUAL_KINDS: dict[str, Callable[[Columns], list[Product]]] = {
    "power": _power,
    "exponential": _exponential,
    "gaussian": _gaussian,
    "gao-b": _gao_b,
    "lemmon-2005": _lemmon_2005,
    "double-exponential": _double_exponential,
}


def residual_products(terms: list[Columns]) -> list[Product]:
    """All separable residual terms as products; a kind not known raises KeyError."""
    products: list[Product] = []
    for term in terms:
        if term["kind"] != NON_ANALYTIC:
            products += RESIDUAL_KINDS[term["kind"]](term)
    return products


class IdealSum:
    """Ideal part as one sum: φ° = ln δ + c₀ + c₁τ + (c₂ + c₃τ) ln τ + Σ n τ^t + Σ n ln(c + d e^(−θτ)), θ > 0."""

    def __init__(self) -> None:
        self.constant = 0.0
        self.linear = 0.0
        self.logarithm = 0.0
        self.tau_logarithm = 0.0
        self.powers: list[tuple[float, float]] = []
        self.einstein: list[tuple[float, float, float, float]] = []

    def add_power(self, n: float, t: float) -> None:
        """Add n τ^t [1]."""
        if t == 0:
            self.constant += n
        elif t == 1:
            self.linear += n
        else:
            self.powers.append((n, t))

    def add_einstein(self, n: float, theta: float, c: float = 1.0, d: float = -1.0) -> None:
        """Add n ln(c + d e^(−θτ)) [1]; a growing exponential is turned into a decaying one."""
        if theta < 0:
            self.linear += -n * theta
            c, d, theta = d, c, -theta
        self.einstein.append((n, theta, c, d))


def _lead(total: IdealSum, term: Columns, reducing_temperature: float) -> None:
    total.constant += term["a1"]
    total.linear += term["a2"]


def _log_tau(total: IdealSum, term: Columns, reducing_temperature: float) -> None:
    total.logarithm += term["a"]


def _ideal_power(total: IdealSum, term: Columns, reducing_temperature: float) -> None:
    for n, t in zip(term["n"], term["t"], strict=True):
        total.add_power(n, t)


def _planck_einstein(total: IdealSum, term: Columns, reducing_temperature: float) -> None:
    """``n ln(1 − e^(−θτ))`` with θ in ``t``."""
    for n, theta in zip(term["n"], term["t"], strict=True):
        total.add_einstein(n, theta)


def _planck_einstein_temperature(total: IdealSum, term: Columns, reducing_temperature: float) -> None:
    """``n ln(1 − e^(−v/T))`` with v [K]."""
    for n, v in zip(term["n"], term["v"], strict=True):
        total.add_einstein(n, v / reducing_temperature)


def _planck_einstein_generalized(total: IdealSum, term: Columns, reducing_temperature: float) -> None:
    """``n ln(c + d e^(tτ))``."""
    for n, t, c, d in zip(term["n"], term["t"], term["c"], term["d"], strict=True):
        total.add_einstein(n, -t, c, d)


def _aly_lee(total: IdealSum, term: Columns, reducing_temperature: float) -> None:
    """c_p°/R = c₀ + c₁ [(c₂/T)/sinh(c₂/T)]² + c₃ [(c₄/T)/cosh(c₄/T)]², the constant counted from T₀ [K].

    With x = c/T, x²/sinh² x is that of ln(1 − e^(−2x)), and −x²/cosh² x that of ln(1 + e^(−2x)): Aly and Lee, Fluid
    Phase Equilib. 6 (1981) 169, doi:10.1016/0378-3812(81)85002-9.
    """
    constant, sinh, sinh_temperature, cosh, cosh_temperature = term["c"]
    _cp0_constant(total, {"c": constant, "T0": term["T0"]}, reducing_temperature)
    if sinh:
        total.add_einstein(sinh, 2 * sinh_temperature / reducing_temperature)
    if cosh:
        total.add_einstein(-cosh, 2 * cosh_temperature / reducing_temperature, 1.0, 1.0)


def _cp0_constant(total: IdealSum, term: Columns, reducing_temperature: float) -> None:
    """c_p°/R = c, counted from the temperature T₀ [K]."""
    _cp0_polynomial(total, {"c": [term["c"]], "t": [0.0], "T0": term["T0"]}, reducing_temperature)


def _cp0_polynomial(total: IdealSum, term: Columns, reducing_temperature: float) -> None:
    """c_p°/R = Σ c T^t, counted from the temperature T₀ [K]."""
    start = term["T0"]
    for c, t in zip(term["c"], term["t"], strict=True):
        ratio = start / reducing_temperature
        if t == 0:
            # c (1 − τ/τ₀ + ln(τ/τ₀)) with 1/τ₀ = T₀/T_r
            total.constant += c * (1.0 + math.log(ratio))
            total.linear -= c * ratio
            total.logarithm += c
        elif t == -1:
            # c [τ/T_r ln(T_r/(τ T₀)) + τ/T_r − 1/T₀]
            total.tau_logarithm -= c / reducing_temperature
            total.linear += c / reducing_temperature * (1.0 - math.log(ratio))
            total.constant -= c / start
        else:
            total.add_power(-c * reducing_temperature**t / (t * (t + 1)), -t)
            total.constant += c * start**t / t
            total.linear -= c * start ** (t + 1) / (reducing_temperature * (t + 1))


#: Kinds of ideal terms: each adds itself to the sum.
IDEAL_KINDS: dict[str, Callable[[IdealSum, Columns, float], None]] = {
    "lead": _lead,
    "log-tau": _log_tau,
    "power": _ideal_power,
    "planck-einstein": _planck_einstein,
    "planck-einstein-temperature": _planck_einstein_temperature,
    "planck-einstein-generalized": _planck_einstein_generalized,
    "heat-capacity-aly-lee": _aly_lee,
    "heat-capacity-constant": _cp0_constant,
    "heat-capacity-polynomial": _cp0_polynomial,
}


def ideal_sum(terms: list[Columns], reducing_temperature: float) -> IdealSum:
    """All ideal terms collected into one sum; ``reducing_temperature`` T_r [K]. A kind not known raises KeyError."""
    total = IdealSum()
    for term in terms:
        IDEAL_KINDS[term["kind"]](total, term, reducing_temperature)
    return total
