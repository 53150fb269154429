"""The Helmholtz-energy kernel: reduced Helmholtz energy and its derivatives up to second order, vectorised.

With δ = ρ/ρ_r, τ = T_r/T and the specific gas constant R::

    a(T, ρ)/(R T) = φ°(δ, τ) + φʳ(δ, τ)

Derivatives are analytic. Separable terms are grouped: C(τ) = W·G(τ) collects all terms that share a density factor,
so a search for density at fixed temperature evaluates the density factors only.
Theory: Span, *Multiparameter Equations of State*, Springer 2000, doi:10.1007/978-3-662-04092-8, chapter 3.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from reportgen.fluids.real.factors import FactorSet
from reportgen.fluids.real.nonanalytic import NonAnalytic
from reportgen.fluids.real.terms import NON_ANALYTIC, ideal_sum, residual_products
from reportgen.fluids.real.workspace import Workspace

__all__ = ["CHUNK", "Helmholtz", "Isotherm", "Properties", "Reduced"]

FloatArray = NDArray[Any]

#: Sum over an axis, without the detour through the method.
_sum = np.add.reduce
_workspace = Workspace()

#: Elements worked on at a time, so that the temporaries stay in the cache.
CHUNK = 2048

#: Multiplications in one matrix product up to which the common linear algebra libraries stay in one thread. Waiting for
#: others on a busy machine costs more than they bring (measured: fifty times), and sums must not depend on their
#: number.
_SINGLE_THREAD_PRODUCT = 250_000


class Reduced(NamedTuple):
    """Reduced Helmholtz energy and scaled derivatives, each of shape (N,), dimensionless.

    ``value`` φ, ``delta`` δφ_δ, ``delta_delta`` δ²φ_δδ, ``tau`` τφ_τ, ``tau_tau`` τ²φ_ττ, ``delta_tau`` δτφ_δτ.
    """

    value: FloatArray
    delta: FloatArray
    delta_delta: FloatArray
    tau: FloatArray
    tau_tau: FloatArray
    delta_tau: FloatArray


class Isotherm(NamedTuple):
    """The part of the residual terms that depends on temperature alone; columns are elements."""

    tau: FloatArray
    collected: FloatArray
    near_critical: bool

    def take(self, chosen: NDArray[Any]) -> Isotherm:
        """The same for some of the elements."""
        return Isotherm(self.tau[chosen], self.collected[:, chosen], self.near_critical)


class Properties(NamedTuple):
    """Properties at given temperature and density, SI, mass basis, each of shape (N,).

    Pressure [Pa], enthalpy [J/kg], entropy [J/(kg*K)], isochoric heat capacity [J/(kg*K)];
    ``pressure_density`` (∂p/∂ρ)_T [J/kg] and ``pressure_temperature`` (∂p/∂T)_ρ [Pa/K].
    """

    pressure: FloatArray
    enthalpy: FloatArray
    entropy: FloatArray
    isochoric_heat_capacity: FloatArray
    pressure_density: FloatArray
    pressure_temperature: FloatArray


class Helmholtz:
    """One equation of state.

    Parameters
    ----------
    ideal, residual : terms as in the data files (see terms.py).
    reducing_temperature : T_r [K].
    reducing_density : ρ_r [kg/m3].
    gas_constant : R [J/(kg*K)].
    dtype : floating type; extended precision serves the fitting of saturation expansions.
    """

    def __init__(
        self,
        ideal: Sequence[Mapping[str, Any]],
        residual: Sequence[Mapping[str, Any]],
        *,
        reducing_temperature: float,
        reducing_density: float,
        gas_constant: float,
        dtype: type[np.floating[Any]] = np.float64,
    ) -> None:
        self.reducing_temperature = reducing_temperature
        self.reducing_density = reducing_density
        self.gas_constant = gas_constant
        products = residual_products(list(residual))
        self.products = tuple(products)
        self.singular_terms = tuple(term for term in residual if term["kind"] == NON_ANALYTIC)
        self._density_factors = FactorSet([product.density_factor for product in products], dtype, "density")
        self._temperature_factors = FactorSet(
            [product.temperature_factor for product in products], dtype, "temperature"
        )
        self._dtype = dtype
        weights = np.zeros((self._density_factors.count, self._temperature_factors.count), dtype=dtype)
        for product, row, column in zip(
            products, self._density_factors.rows, self._temperature_factors.rows, strict=True
        ):
            weights[row, column] += dtype(product.coefficient)
        self._weights = weights
        self._block = max(1, _SINGLE_THREAD_PRODUCT // weights.size)
        self._non_analytic = [NonAnalytic(term, dtype) for term in self.singular_terms]
        self.ideal_sum = total = ideal_sum(list(ideal), reducing_temperature)
        self._tau_logarithm = total.tau_logarithm
        powers = np.array(total.powers, dtype=dtype).reshape(-1, 2, 1)
        self._power_n, self._power_t = powers[:, 0], powers[:, 1]
        einstein = np.array(total.einstein, dtype=dtype).reshape(-1, 4, 1)
        self._einstein_n, self._einstein_theta = einstein[:, 0], einstein[:, 1]
        self._einstein_c, self._einstein_d = einstein[:, 2], einstein[:, 3]

    def _collect(self, g: FloatArray, result: FloatArray) -> FloatArray:
        """C = W·G for temperature factors G of shape (factors, N), put into ``result``."""
        for start in range(0, g.shape[1], self._block):
            part = slice(start, start + self._block)
            np.matmul(self._weights, g[:, part], out=result[:, part])
        return result

    def _collected(self, tau: FloatArray, order: int) -> list[FloatArray]:
        """C and its derivatives in τ up to an order, as far as the temperature factors give them."""
        return [
            self._collect(g, self._scratch(f"collected {i}", tau.size))
            for i, g in enumerate(self._temperature_factors.values(tau, np.log(tau), order))
        ]

    def _sums(
        self, factors: Sequence[FloatArray], collected: Sequence[FloatArray], chosen: Iterable[tuple[int, int]]
    ) -> list[FloatArray]:
        """Σ F C over all rows, with the derivatives of F and of C that are chosen by their orders."""
        product = self._scratch("product", collected[0].shape[1])
        return [_sum(np.multiply(factors[i], collected[j], out=product), axis=0) for i, j in chosen]

    def _scratch(self, name: str, size: int) -> FloatArray:
        return _workspace.array(name, self._weights.shape[0], size, self._dtype)

    def ideal(self, delta: FloatArray, tau: FloatArray) -> Reduced:
        """φ° and its scaled derivatives [1] at δ, τ [1] of shape (N,)."""
        constant, linear, logarithm = self.ideal_sum.constant, self.ideal_sum.linear, self.ideal_sum.logarithm
        log_tau = np.log(tau)
        value = np.log(delta) + (constant + linear * tau + logarithm * log_tau)
        first = linear * tau + logarithm
        second = np.full_like(tau, -logarithm)
        if self._tau_logarithm:
            rising = self._tau_logarithm * tau
            second += rising
            rising = rising * log_tau
            value += rising
            first += rising + self._tau_logarithm * tau
        if self._power_n.size:
            terms = self._power_n * np.exp(self._power_t * log_tau)
            value += _sum(terms, axis=0)
            terms *= self._power_t
            first += _sum(terms, axis=0)
            second += _sum((self._power_t - 1) * terms, axis=0)
        if self._einstein_n.size:
            # n ln(c + e), e = d exp(−x), x = θτ: τφ_τ = −n x e/(c + e), τ²φ_ττ = n x² c e/(c + e)²
            x = self._einstein_theta * tau
            decay = np.exp(-x)
            decay *= self._einstein_d
            total = self._einstein_c + decay
            decay /= total
            decay *= x
            value += _sum(self._einstein_n * np.log(total), axis=0)
            first -= _sum(self._einstein_n * decay, axis=0)
            decay *= x
            decay *= self._einstein_n * self._einstein_c
            decay /= total
            second += _sum(decay, axis=0)
        zero = np.zeros_like(tau)
        one = zero + 1
        return Reduced(value, one, -one, first, second, zero)

    def shift(self, enthalpy: float, entropy: float) -> None:
        """Raise all enthalpies [J/kg] and entropies [J/(kg*K)] by constants: adds τΔh/(R T_r) − Δs/R to φ°."""
        self.ideal_sum.linear += enthalpy / (self.gas_constant * self.reducing_temperature)
        self.ideal_sum.constant -= entropy / self.gas_constant

    def isotherm(self, temperature: FloatArray) -> Isotherm:
        """What depends on temperature T [K] alone, for repeated evaluation at different densities."""
        tau = self.reducing_temperature / temperature
        (g,) = self._temperature_factors.values(tau, np.log(tau), 0)
        collected = self._collect(g, np.empty((self._weights.shape[0], tau.size), dtype=self._dtype))
        near = bool(self._non_analytic) and any(
            term.matters(np.ones_like(tau), tau).size > 0 for term in self._non_analytic
        )
        return Isotherm(tau, collected, near)

    def density_derivatives(self, delta: FloatArray, isotherm: Isotherm) -> tuple[FloatArray, FloatArray]:
        """δφʳ_δ and δ²φʳ_δδ [1] at δ [1] of shape (N,) along isotherms of N elements."""
        _, first, second = self._density_factors.values(delta, np.log(delta))
        collected = isotherm.collected
        first *= collected
        second *= collected
        phi_d = _sum(first, axis=0)
        phi_dd = _sum(second, axis=0)
        if isotherm.near_critical:
            for term in self._non_analytic:
                where = term.matters(delta, isotherm.tau)
                if where.size:
                    add = term.values(delta[where], isotherm.tau[where], density_only=True)
                    phi_d[where] += add[0]
                    phi_dd[where] += add[1]
        return phi_d, phi_dd

    def residual(self, delta: FloatArray, tau: FloatArray) -> Reduced:
        """φʳ and its scaled derivatives [1] at δ, τ [1] of shape (N,)."""
        factors = self._density_factors.values(delta, np.log(delta))
        sums = self._sums(factors, self._collected(tau, 2), ((0, 0), (1, 0), (2, 0), (0, 1), (0, 2), (1, 1)))
        for term in self._non_analytic:
            where = term.matters(delta, tau)
            if where.size:
                first, second, value, tau_first, tau_second, mixed = term.values(delta[where], tau[where])
                for total, add in zip(sums, (value, first, second, tau_first, tau_second, mixed), strict=True):
                    total[where] += add
        return Reduced(*sums)

    def coexisting(self, temperature: FloatArray, liquid: FloatArray, vapour: FloatArray) -> tuple[FloatArray, ...]:
        """h of liquid and vapour [J/kg] and s of both [J/(kg*K)] at T [K] and their densities [kg/m3] of shape (N,).

        What depends on temperature is computed once for both, and no second derivatives.
        """
        size = temperature.size
        results = tuple(np.empty(size, dtype=self._dtype) for _ in range(4))
        for start in range(0, size, CHUNK):
            part = slice(start, start + CHUNK)
            values = self._coexisting(temperature[part], liquid[part], vapour[part])
            for result, value in zip(results, values, strict=True):
                result[part] = value
        return results

    def _coexisting(self, temperature: FloatArray, liquid: FloatArray, vapour: FloatArray) -> tuple[FloatArray, ...]:
        tau = self.reducing_temperature / temperature
        collected = self._collected(tau, 1)
        ideal = self.ideal(np.ones_like(tau), tau)
        enthalpies, entropies = [], []
        for density in (liquid, vapour):
            delta = density / self.reducing_density
            log_delta = np.log(delta)
            f, f_first = self._density_factors.values(delta, log_delta, 1)
            value, first, tau_first = self._sums((f, f_first), collected, ((0, 0), (1, 0), (0, 1)))
            for term in self._non_analytic:
                where = term.matters(delta, tau)
                if where.size:
                    add = term.values(delta[where], tau[where])
                    first[where] += add[0]
                    value[where] += add[2]
                    tau_first[where] += add[3]
            tau_first += ideal.tau
            enthalpies.append(self.gas_constant * temperature * (1 + first + tau_first))
            entropies.append(self.gas_constant * (tau_first - ideal.value - log_delta - value))
        return *enthalpies, *entropies

    def pressure(
        self, density: FloatArray, temperature: FloatArray, isotherm: Isotherm
    ) -> tuple[FloatArray, FloatArray]:
        """Pressure p [Pa] and (∂p/∂ρ)_T [J/kg] at density [kg/m3] along isotherms of temperature [K]."""
        phi_d, phi_dd = self.density_derivatives(density / self.reducing_density, isotherm)
        rt = self.gas_constant * temperature
        phi_dd += phi_d
        phi_d += 1
        phi_dd += phi_d
        phi_dd *= rt
        rt *= density
        phi_d *= rt
        return phi_d, phi_dd

    def properties(self, temperature: FloatArray, density: FloatArray) -> Properties:
        """All properties at temperature T [K] and density ρ [kg/m3] of shape (N,).

        ``p = ρRT(1 + δφʳ_δ)``, ``h = RT(1 + τφ_τ + δφʳ_δ)``, ``s = R(τφ_τ − φ)``, ``c_v = −Rτ²φ_ττ``,
        ``(∂p/∂ρ)_T = RT(1 + 2δφʳ_δ + δ²φʳ_δδ)``, ``(∂p/∂T)_ρ = ρR(1 + δφʳ_δ − δτφʳ_δτ)``.
        """
        if temperature.size > CHUNK:
            blocks = [
                self._properties(temperature[start : start + CHUNK], density[start : start + CHUNK])
                for start in range(0, temperature.size, CHUNK)
            ]
            return Properties(*(np.concatenate(parts) for parts in zip(*blocks, strict=True)))
        return self._properties(temperature, density)

    def _properties(self, temperature: FloatArray, density: FloatArray) -> Properties:
        delta = density / self.reducing_density
        tau = self.reducing_temperature / temperature
        ideal = self.ideal(delta, tau)
        residual = self.residual(delta, tau)
        gas_constant = self.gas_constant
        rt = gas_constant * temperature
        compressibility = 1 + residual.delta
        phi_tau = ideal.tau + residual.tau
        return Properties(
            pressure=density * rt * compressibility,
            enthalpy=rt * (compressibility + phi_tau),
            entropy=gas_constant * (phi_tau - ideal.value - residual.value),
            isochoric_heat_capacity=-gas_constant * (ideal.tau_tau + residual.tau_tau),
            pressure_density=rt * (compressibility + residual.delta + residual.delta_delta),
            pressure_temperature=density * gas_constant * (compressibility - residual.delta_tau),
        )
