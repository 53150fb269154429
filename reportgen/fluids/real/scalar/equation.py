"""The Helmholtz-energy kernel for one state at a time, with ``math`` in place of numpy; see ../helmholtz.py.

Derivatives are carried as powers of the operators D = δ∂/∂δ and T = τ∂/∂τ, since for one term
n δ^d τ^t exp(−u), u = g δ^l, they only multiply it::

    D → d − l u        D² → (d − l u)² − l² u        T → t        T² → t²

Terms with the same g and l share one exponential, and their sums Σ f, Σ d f, Σ d² f ... are combined afterwards.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from math import exp, log
from typing import Any, NamedTuple

from reportgen.fluids.real.factors import Factor
from reportgen.fluids.real.scalar.nonanalytic import ScalarNonAnalytic
from reportgen.fluids.real.terms import IdealSum, Product

__all__ = ["ScalarEquation", "ScalarIsotherm"]

#: Factors below e^(−60) = 9e-27 are left out: next to the ideal gas they change no digit.
_NEGLIGIBLE = -60.0

#: Parameters of a factor in the order of its class.
Parameters = tuple[float, float, float, float, float, float, float]


class ScalarIsotherm(NamedTuple):
    """What depends on temperature alone: the coefficients of the density factors.

    ``tau`` is T_r/T [1]; ``groups`` holds, for each group of terms, its l and g, the coefficients and the exponents d;
    ``bells`` the coefficient, d, η and ε of each Gaussian; ``others`` the coefficient and density factor of further
    terms. ``near_critical`` tells whether non-analytic terms may count, ``exact`` whether the third derivative is
    complete.
    """

    tau: float
    groups: list[tuple[float, float, list[float], tuple[float, ...]]]
    bells: list[tuple[float, float, float, float]]
    others: list[tuple[float, Parameters]]
    near_critical: bool
    exact: bool


class ScalarEquation:
    """One equation of state, evaluated at one state.

    Parameters
    ----------
    products : the separable residual terms.
    non_analytic : tables of the non-analytic ones, as in the data files.
    ideal : the ideal part.
    reducing_temperature : T_r [K].
    reducing_density : ρ_r [kg/m3].
    gas_constant : R [J/(kg*K)].
    """

    def __init__(
        self,
        products: Sequence[Product],
        non_analytic: Sequence[Mapping[str, Any]],
        ideal: IdealSum,
        *,
        reducing_temperature: float,
        reducing_density: float,
        gas_constant: float,
    ) -> None:
        self.reducing_temperature = reducing_temperature
        self.reducing_density = reducing_density
        self.gas_constant = gas_constant
        self._constant, self._linear, self._logarithm = ideal.constant, ideal.linear, ideal.logarithm
        self._tau_logarithm = ideal.tau_logarithm
        self._powers, self._einstein = tuple(ideal.powers), tuple(ideal.einstein)
        plain: dict[tuple[float, float], list[tuple[float, float, float]]] = {}
        bells, others = [], []
        for product in products:
            density, temperature = product.density_factor, product.temperature_factor
            if _is_plain(temperature) and not (density.width or density.offset):
                key = (density.power, density.rate) if density.rate else (0.0, 0.0)
                plain.setdefault(key, []).append((product.coefficient, density.exponent, temperature.exponent))
            elif not (density.rate or density.offset or temperature.rate or temperature.offset):
                exponents = density.exponent, temperature.exponent
                bell = density.width, density.centre, temperature.width, temperature.centre
                bells.append((product.coefficient, *exponents, *bell))
            else:
                others.append((product.coefficient, _parameters(density), _parameters(temperature)))
        self._groups = tuple((*key, tuple(terms)) for key, terms in sorted(plain.items()))
        self._rows = tuple(_by_exponent(*group) for group in self._groups)
        self._bells, self._others = tuple(bells), tuple(others)
        self._non_analytic = tuple(ScalarNonAnalytic(term) for term in non_analytic)

    # -- ideal part ----------------------------------------------------------------------------------------------------

    def _ideal(self, tau: float) -> tuple[float, float, float]:
        """φ° − ln δ, τφ°_τ, τ²φ°_ττ [1]."""
        log_tau = log(tau)
        linear = self._linear * tau
        value = self._constant + linear + self._logarithm * log_tau
        first, second = linear + self._logarithm, -self._logarithm
        if self._tau_logarithm:
            rising = self._tau_logarithm * tau
            value += rising * log_tau
            first += rising * (log_tau + 1.0)
            second += rising
        for n, t in self._powers:
            term = n * tau**t
            value += term
            term *= t
            first += term
            second += (t - 1.0) * term
        for n, theta, c, d in self._einstein:
            x = theta * tau
            decay = d * exp(-x)
            total = c + decay
            value += n * log(total)
            decay *= n * x / total
            first -= decay
            second += decay * x * c / total
        return value, first, second

    # -- residual part -------------------------------------------------------------------------------------------------

    def _residual(self, delta: float, tau: float) -> tuple[float, float, float, float, float, float]:
        """φʳ, Dφʳ, D²φʳ, Tφʳ, T²φʳ, DTφʳ [1]."""
        a = a_d = a_dd = a_t = a_tt = a_dt = 0.0
        for power, rate, terms in self._groups:
            s0 = s1 = s2 = t0 = t1 = q0 = 0.0
            for n, d, t in terms:
                f = n * delta**d * tau**t
                s0 += f
                g = f * t
                f *= d
                s1 += f
                s2 += f * d
                t0 += g
                t1 += g * d
                q0 += g * t
            if rate:
                u = rate * delta**power
                e = exp(-u)
                u *= power
                a += e * s0
                a_d += e * (s1 - u * s0)
                a_dd += e * (s2 - u * (s1 + s1 + (power - u) * s0))
                a_t += e * t0
                a_tt += e * q0
                a_dt += e * (t1 - u * t0)
            else:
                a += s0
                a_d += s1
                a_dd += s2
                a_t += t0
                a_tt += q0
                a_dt += t1
        for n, d, t, eta, epsilon, beta, gamma in self._bells:
            x, y = delta - epsilon, tau - gamma
            p, q = eta * x, beta * y
            exponent = -p * x - q * y
            if exponent < _NEGLIGIBLE:
                continue
            f = n * delta**d * tau**t * exp(exponent)
            p *= 2.0 * delta
            q *= 2.0 * tau
            p_d = -p - 2.0 * eta * delta * delta
            q_t = -q - 2.0 * beta * tau * tau
            p = d - p
            q = t - q
            a += f
            a_d += f * p
            a_dd += f * (p * p + p_d)
            a_tt += f * (q * q + q_t)
            f *= q
            a_t += f
            a_dt += f * p
        for n, density, temperature in self._others:
            f, p, p_d = _factor(delta, density)
            g, q, q_t = _factor(tau, temperature)
            f *= n * g
            a += f
            a_d += f * p
            a_dd += f * (p * p + p_d)
            a_t += f * q
            a_tt += f * (q * q + q_t)
            a_dt += f * p * q
        for singular in self._non_analytic:
            if singular.matters(delta, tau):
                add = singular.values(delta, tau)
                a += add[0]
                a_d += add[1]
                a_dd += add[2]
                a_t += add[3]
                a_tt += add[4]
                a_dt += add[5]
        return a, a_d, a_dd, a_t, a_tt, a_dt

    def properties(self, temperature: float, density: float) -> tuple[float, float, float, float, float, float]:
        """p [Pa], h [J/kg], s [J/(kg*K)], c_v [J/(kg*K)], (∂p/∂ρ)_T [J/kg], (∂p/∂T)_ρ [Pa/K] at T [K], ρ [kg/m3]."""
        delta, tau = density / self.reducing_density, self.reducing_temperature / temperature
        value, first, second = self._ideal(tau)
        a, a_d, a_dd, a_t, a_tt, a_dt = self._residual(delta, tau)
        gas_constant = self.gas_constant
        rt = gas_constant * temperature
        compressibility = 1.0 + a_d
        phi_tau = first + a_t
        return (
            density * rt * compressibility,
            rt * (compressibility + phi_tau),
            gas_constant * (phi_tau - value - log(delta) - a),
            -gas_constant * (second + (a_tt - a_t)),
            rt * (compressibility + a_dd),
            density * gas_constant * (compressibility - a_dt),
        )

    def coexisting(self, temperature: float, liquid: float, vapour: float) -> tuple[float, float, float, float]:
        """h of liquid and vapour [J/kg], s of both [J/(kg*K)] at T [K] and their densities [kg/m3]: what depends on
        temperature alone is computed once.
        """
        reducing = self.reducing_density
        delta, other, tau = liquid / reducing, vapour / reducing, self.reducing_temperature / temperature
        value, first, _ = self._ideal(tau)
        # D φʳ + T φʳ for the enthalpy, T φʳ − φʳ for the entropy, of each phase
        h_l = h_v = s_l = s_v = 0.0
        for power, rate, terms in self._groups:
            a = a_d = a_t = b = b_d = b_t = 0.0
            for n, d, t in terms:
                g = n * tau**t
                f = g * delta**d
                a += f
                a_d += f * d
                a_t += f * t
                f = g * other**d
                b += f
                b_d += f * d
                b_t += f * t
            if rate:
                u, w = rate * delta**power, rate * other**power
                e = exp(-u)
                h_l += e * (a_d + a_t - power * u * a)
                s_l += e * (a_t - a)
                e = exp(-w)
                h_v += e * (b_d + b_t - power * w * b)
                s_v += e * (b_t - b)
            else:
                h_l += a_d + a_t
                s_l += a_t - a
                h_v += b_d + b_t
                s_v += b_t - b
        if self._bells or self._others or self._non_analytic:
            add = self._rest(delta, tau)
            h_l += add[0]
            s_l += add[1]
            add = self._rest(other, tau)
            h_v += add[0]
            s_v += add[1]
        gas_constant = self.gas_constant
        rt = gas_constant * temperature
        s0 = first - value
        return (
            rt * (1.0 + first + h_l),
            rt * (1.0 + first + h_v),
            gas_constant * (s0 - log(delta) + s_l),
            gas_constant * (s0 - log(other) + s_v),
        )

    def _rest(self, delta: float, tau: float) -> tuple[float, float]:
        """Dφʳ + Tφʳ and Tφʳ − φʳ [1] of the terms that are not in groups."""
        h = s = 0.0
        for n, d, t, eta, epsilon, beta, gamma in self._bells:
            x, y = delta - epsilon, tau - gamma
            p, q = eta * x, beta * y
            exponent = -p * x - q * y
            if exponent > _NEGLIGIBLE:
                f = n * delta**d * tau**t * exp(exponent)
                q = t - 2.0 * tau * q
                h += f * (d - 2.0 * delta * p + q)
                s += f * (q - 1.0)
        for n, density, temperature in self._others:
            f, p, _ = _factor(delta, density)
            g, q, _ = _factor(tau, temperature)
            f *= n * g
            h += f * (p + q)
            s += f * (q - 1.0)
        for singular in self._non_analytic:
            if singular.matters(delta, tau):
                add = singular.values(delta, tau)
                h += add[1] + add[3]
                s += add[3] - add[0]
        return h, s

    # -- along an isotherm ---------------------------------------------------------------------------------------------

    def isotherm(self, temperature: float) -> ScalarIsotherm:
        """What depends on temperature T [K] alone, for repeated evaluation at different densities."""
        tau = self.reducing_temperature / temperature
        groups = []
        for power, rate, firsts, further, exponents in self._rows:
            c = [n * tau**t for n, t in firsts]
            for row, n, t in further:
                c[row] += n * tau**t
            groups.append((power, rate, c, exponents))
        bells = []
        for n, d, t, eta, epsilon, beta, gamma in self._bells:
            y = tau - gamma
            exponent = -beta * y * y
            if exponent > _NEGLIGIBLE:
                bells.append((n * tau**t * exp(exponent), d, eta, epsilon))
        others = [(n * _factor(tau, temperature)[0], density) for n, density, temperature in self._others]
        near = any(term.matters(1.0, tau) for term in self._non_analytic)
        return ScalarIsotherm(tau, groups, bells, others, near, not (others or near))

    def pressure(self, density: float, temperature: float, isotherm: ScalarIsotherm) -> tuple[float, float, float]:
        """p [Pa], ρ(∂p/∂ρ)_T [Pa] and its derivative with respect to ln ρ [Pa] at ρ [kg/m3] along an isotherm.

        Where the isotherm is not ``exact``, the last one is an approximation.
        """
        delta = density / self.reducing_density
        first = second = third = 0.0
        for power, rate, coefficients, exponents in isotherm.groups:
            s0 = s1 = s2 = s3 = 0.0
            for c, d in zip(coefficients, exponents):  # noqa: B905 (as long as each other by construction)
                f = c * delta**d
                s0 += f
                f *= d
                s1 += f
                f *= d
                s2 += f
                s3 += f * d
            if rate:
                u = rate * delta**power
                e = exp(-u)
                u *= power
                # (d − u)² − l u and (d − u)³ − 3 l u (d − u) − l² u in powers of d
                square = u * (u - power)
                first += e * (s1 - u * s0)
                second += e * (s2 - 2.0 * u * s1 + square * s0)
                third += e * (s3 - 3.0 * (u * s2 - square * s1) - u * (u * u - power * (3.0 * u - power)) * s0)
            else:
                first += s1
                second += s2
                third += s3
        for c, d, eta, epsilon in isotherm.bells:
            x = delta - epsilon
            exponent = -eta * x * x
            if exponent > _NEGLIGIBLE:
                f = c * delta**d * exp(exponent)
                p = d - 2.0 * eta * delta * x
                bend = -2.0 * eta * delta * (delta + x)
                square = p * p + bend
                first += f * p
                second += f * square
                third += f * (p * (square + 2.0 * bend) - 2.0 * eta * delta * (4.0 * delta - epsilon))
        for c, parameters in isotherm.others:
            f, p, bend = _factor(delta, parameters)
            f *= c
            square = p * p + bend
            first += f * p
            second += f * square
            third += f * p * (square + 2.0 * bend)
        if isotherm.near_critical:
            for singular in self._non_analytic:
                if singular.matters(delta, isotherm.tau):
                    add = singular.values(delta, isotherm.tau)
                    first += add[1]
                    second += add[2]
        scale = density * self.gas_constant * temperature
        compressibility = 1.0 + first
        slope = compressibility + second
        return scale * compressibility, scale * slope, scale * (slope + second + third)


def _is_plain(factor: Factor) -> bool:
    return not (factor.rate or factor.width or factor.offset)


def _parameters(factor: Factor) -> Parameters:
    return (factor.exponent, factor.rate, factor.power, factor.width, factor.centre, factor.offset, factor.slope)


def _factor(x: float, parameters: Parameters) -> tuple[float, float, float]:
    """F, P = x F′/F and x P′ [1] of a factor as in ../factors.py."""
    exponent, rate, power, width, centre, offset, slope = parameters
    shift = x - centre
    bell = width * shift
    log_f = -bell * shift
    first = exponent - 2.0 * x * bell
    second = -2.0 * x * width * (x + shift)
    if rate:
        u = rate * x**power
        log_f -= u
        u *= power
        first -= u
        second -= u * power
    if offset:
        parabola = offset + slope * shift * shift
        log_f += 1.0 / parabola
        square = slope / (parabola * parabola)
        first -= 2.0 * x * shift * square
        second += 8.0 * (slope * x * shift) ** 2 / parabola**3 - 2.0 * x * (x + shift) * square
    return x**exponent * exp(log_f), first, second


def _by_exponent(
    power: float, rate: float, terms: tuple[tuple[float, float, float], ...]
) -> tuple[float, float, list[tuple[float, float]], list[tuple[int, float, float]], tuple[float, ...]]:
    """The terms of a group by their exponents d: for each d its first term (n, t); further ones (row, n, t); the d."""
    firsts: list[tuple[float, float]] = []
    further: list[tuple[int, float, float]] = []
    exponents: list[float] = []
    for n, d, t in terms:
        if d in exponents:
            further.append((exponents.index(d), n, t))
        else:
            exponents.append(d)
            firsts.append((n, t))
    return power, rate, firsts, further, tuple(exponents)
