"""Cubic equations against an independent library: ``python -m tests.benchmarks.cubic_table``.

The library is ``thermo`` with the same critical constants, interaction coefficients and gas constant. Pure substances:
volume, Z, departures of h, s, c_p, fugacity coefficient and saturation pressure. Mixtures: phase count, share of
vapour, compositions, and for each phase volume and departures of h, s, c_p; and, with the library's own fugacities, how
equal the fugacities of the phases found here are. Its flash is asked for more than its usual tolerance. Where the two
disagree on the number of phases, the Gibbs energy, by the library's equation, says who is right.

Deviations are in parts of the value, at least of R T or R; of shares and mole fractions as they are.
"""

from __future__ import annotations

import argparse
from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Any

import numpy as np
import thermo
from numpy.typing import NDArray

from reportgen import fluids
from reportgen.fluids.cubics.fluid import CubicFluid

__all__ = ["MIXTURES", "PURE", "Worst", "compare_mixture", "compare_pure", "states_of"]

R = 8.31446261815324
Array = NDArray[Any]

#: Pure substances: species, equation.
PURE = tuple(
    (name, equation)
    for name in ("CH4", "CO2", "N2", "H2O", "propane", "n-octane", "ethanol", "NH3", "CH2F2", "C6H6")
    for equation in ("Peng-Robinson", "Soave-Redlich-Kwong")
)

#: Mixtures: composition, keywords, range of T [K] and of p [Pa].
MIXTURES: dict[str, tuple[dict[str, float], dict[str, Any], tuple[float, float], tuple[float, float]]] = {
    "natural gas": (
        {"CH4": 0.70, "C2H6": 0.12, "C3H8": 0.08, "N2": 0.04, "CO2": 0.06},
        {"interaction": {("CO2", "N2"): -0.02, ("CH4", "CO2"): 0.1, ("N2", "CH4"): 0.03}},
        (120.0, 300.0),
        (1e5, 1.2e7),
    ),
    "air": ({"N2": 0.78, "O2": 0.21, "Ar": 0.01}, {"interaction": {("N2", "O2"): -0.012}}, (75.0, 140.0), (1e5, 5e6)),
    "CO2 and N2": ({"CO2": 0.8, "N2": 0.2}, {"interaction": {("CO2", "N2"): -0.017}}, (210.0, 310.0), (5e5, 1.5e7)),
    "butane and pentane": (
        {"n-butane": 0.5, "n-pentane": 0.5},
        {"equation": "Soave-Redlich-Kwong"},
        (280.0, 470.0),
        (1e5, 4.5e6),
    ),
    "sour gas": (
        {"H2S": 0.3, "CH4": 0.5, "CO2": 0.2},
        {
            "equation": "Soave-Redlich-Kwong",
            "interaction": {("H2S", "CH4"): 0.08, ("CO2", "CH4"): 0.1, ("H2S", "CO2"): 0.1},
        },
        (210.0, 330.0),
        (5e5, 1.5e7),
    ),
    "methane and octane": ({"CH4": 0.9, "n-octane": 0.1}, {}, (260.0, 480.0), (5e5, 2.5e7)),
}


@dataclass
class Worst:
    """Worst deviation of each quantity, with what was counted."""

    deviations: dict[str, float] = field(default_factory=dict)
    counts: dict[str, int] = field(default_factory=dict)

    def note(self, name: str, deviation: float) -> None:
        self.deviations[name] = max(self.deviations.get(name, 0.0), float(deviation))

    def count(self, name: str) -> None:
        self.counts[name] = self.counts.get(name, 0) + 1


def _part(ours: float, theirs: float, least: float = 0.0) -> float:
    return abs(ours - theirs) / max(abs(theirs), least)


def _library_pure(fluid: CubicFluid, equation: str, **state: float) -> Any:
    mixture = fluid._equilibria.model.mixture
    classes = {"Peng-Robinson": thermo.PR, "Soave-Redlich-Kwong": thermo.SRK}
    maker = classes[equation]
    if equation == "Peng-Robinson" and mixture.factors[0] > 0.491:
        maker = thermo.PR78
    constants = {
        "Tc": float(mixture.critical_temperatures[0]),
        "Pc": float(mixture.critical_pressures[0]),
        "omega": float(mixture.factors[0]),
    }
    return maker(**constants, **state)


def compare_pure(name: str, equation: str, count: int, seed: int = 0) -> Worst:
    """``count`` random states of a pure substance, single phase, and as many saturation pressures."""
    fluid = fluids.cubic(name, equation=equation)  # type: ignore[arg-type]
    critical = fluid.limits.critical_point
    assert critical is not None
    random = np.random.default_rng(seed)
    lowest = max(0.45 * critical.temperature, fluid.limits.minimum_temperature)
    temperature = random.uniform(lowest, 2.0 * critical.temperature, count)
    highest = np.log(min(15.0, fluid.limits.maximum_pressure / critical.pressure))
    pressure = critical.pressure * np.exp(random.uniform(np.log(1e-3), highest, count))
    state = fluid.at(temperature=temperature, pressure=pressure)
    h, s, c = (part[0] for part in fluid._equilibria.model.ideal.properties(temperature))
    mass = fluid.molar_mass
    enthalpy = mass * state.specific_enthalpy - h
    entropy = mass * state.specific_entropy - s + R * np.log(pressure / 1e5)
    capacity = mass * state.isobaric_heat_capacity - c
    worst = Worst()
    for i in range(count):
        t, p = float(temperature[i]), float(pressure[i])
        library = _library_pure(fluid, equation, T=t, P=p)
        phase = "l" if not hasattr(library, "V_g") else "g"
        if hasattr(library, "V_l") and hasattr(library, "V_g"):
            phase = "l" if library.G_dep_l < library.G_dep_g else "g"
        worst.note("volume", _part(mass / state.density[i], getattr(library, f"V_{phase}")))
        worst.note("Z", _part(state.compressibility_factor[i], getattr(library, f"Z_{phase}")))
        worst.note("h", _part(enthalpy[i], getattr(library, f"H_dep_{phase}"), R * t))
        worst.note("s", _part(entropy[i], getattr(library, f"S_dep_{phase}"), R))
        worst.note("c_p", _part(capacity[i], getattr(library, f"Cp_dep_{phase}"), R))
        ours = (enthalpy[i] - t * entropy[i]) / (R * t)
        worst.note("ln φ", _part(ours, np.log(getattr(library, f"phi_{phase}")), 1.0))
    for t in random.uniform(lowest, 0.999 * critical.temperature, count):
        library = _library_pure(fluid, equation, T=float(t), P=1e5)
        worst.note("p_sat", _part(float(fluid.saturation(temperature=t)[0].pressure), library.Psat(float(t))))
    worst.counts = {"states": count}
    return worst


def _library_mixture(fluid: CubicFluid, equation: str) -> tuple[Any, dict[str, Any], Any]:
    """Equation of the library, its keywords, and a flash."""
    model = fluid._equilibria.model
    mixture = model.mixture
    size = mixture.size
    maker = {"Peng-Robinson": thermo.PRMIX, "Soave-Redlich-Kwong": thermo.SRKMIX}[equation]
    names = [str(number) for number in range(size)]
    constants = thermo.ChemicalConstantsPackage(
        Tcs=mixture.critical_temperatures.tolist(),
        Pcs=mixture.critical_pressures.tolist(),
        omegas=mixture.factors.tolist(),
        MWs=(model.molar_masses * 1e3).tolist(),
        CASs=names,
        names=names,
    )
    capacities = [thermo.HeatCapacityGas(poly_fit=(50.0, 1000.0, [0.0, 35.0])) for _ in names]
    correlations = thermo.PropertyCorrelationsPackage(
        constants=constants, HeatCapacityGases=capacities, skip_missing=True
    )
    keywords = {
        "Tcs": constants.Tcs,
        "Pcs": constants.Pcs,
        "omegas": constants.omegas,
        "kijs": (1.0 - mixture.coupling).tolist(),
    }
    flash = thermo.FlashVL(
        constants,
        correlations,
        liquid=thermo.CEOSLiquid(maker, keywords, HeatCapacityGases=capacities),
        gas=thermo.CEOSGas(maker, keywords, HeatCapacityGases=capacities),
    )
    flash.PT_SS_TOL = 1e-28
    return maker, keywords, flash


class _LibraryPhase:
    """One phase by the library's equation, on its root of the lower Gibbs energy."""

    def __init__(self, maker: Any, keywords: Mapping[str, Any], t: float, p: float, fractions: list[float]) -> None:
        self._equation = maker(**keywords, zs=fractions, T=t, P=p)
        liquid, gas = hasattr(self._equation, "V_l"), hasattr(self._equation, "V_g")
        both = liquid and gas
        dense = both and self._equation.G_dep_l < self._equation.G_dep_g
        self._phase = "l" if dense or not gas else "g"
        self.ln_f = np.log(fractions) + np.array(getattr(self._equation, f"lnphis_{self._phase}"))
        self.gibbs = float(np.dot(fractions, self.ln_f))

    def __getattr__(self, name: str) -> float:
        return float(getattr(self._equation, f"{name}_{self._phase}"))


def states_of(name: str, count: int, seed: int = 0) -> tuple[Array, Array]:
    """Random temperatures [K] and pressures [Pa] of a mixture, half of them near its phase envelope."""
    composition, keywords, temperatures, pressures = MIXTURES[name]
    random = np.random.default_rng(seed)
    temperature = random.uniform(*temperatures, count)
    pressure = np.exp(random.uniform(*np.log(pressures), count))
    fluid = fluids.cubic(composition, **keywords)
    half = count // 2
    dew = fluid.at(errors="mask", temperature=temperature[:half], quality=random.integers(0, 2, half)).pressure
    near = dew * np.exp(random.uniform(-0.2, 0.2, half))
    pressure[:half] = np.where(np.isfinite(near) & (near > 1e3), near, pressure[:half])
    return temperature, pressure


def compare_mixture(name: str, count: int, seed: int = 0) -> Worst:
    """``count`` random states of a mixture of MIXTURES."""
    composition, keywords, _, _ = MIXTURES[name]
    fluid = fluids.cubic(composition, **keywords)
    maker, constants, flash = _library_mixture(fluid, keywords.get("equation", "Peng-Robinson"))
    feed = list((fluid.composition or {}).values())
    temperature, pressure = states_of(name, count, seed)
    split = fluid.phases(temperature, pressure)
    worst = Worst()
    for i in range(count):
        t, p, share = float(temperature[i]), float(pressure[i]), float(split.vapour_share[i])
        mixed = 0.0 < share < 1.0
        ours = {}
        if mixed:
            sides = (("liquid", split.liquid_fractions[i]), ("vapour", split.vapour_fractions[i]))
        else:
            sides = (("vapour" if share else "liquid", np.array(feed)),)
        for side, fractions in sides:
            ours[side] = phase = _LibraryPhase(maker, constants, t, p, list(fractions))
            _compare_phase(fluid, getattr(split, side), i, fractions, phase, worst)
        gibbs = ours["liquid"].gibbs * (1.0 - share) if "liquid" in ours else 0.0
        gibbs += ours["vapour"].gibbs * share if "vapour" in ours else 0.0
        if mixed:
            worst.count("two-phase")
            worst.note("Δ ln f", np.max(np.abs(ours["liquid"].ln_f - ours["vapour"].ln_f)))
        else:
            worst.count("one phase")
        theirs = flash.flash(T=t, P=p, zs=feed)
        if theirs.phase_count != (2 if mixed else 1):
            total = sum(
                beta * _LibraryPhase(maker, constants, t, p, phase.zs).gibbs
                for beta, phase in zip(theirs.betas, theirs.phases, strict=True)
            )
            # the answer of the lower Gibbs energy is the equilibrium
            worst.count("phase count: library wrong" if gibbs <= total + 1e-12 else "phase count: WRONG HERE")
            worst.note("G above the library's", max(gibbs - total, 0.0))
        elif mixed:
            _compare_split(split, i, theirs, worst)
    return worst


def _compare_split(split: Any, i: int, theirs: Any, worst: Worst) -> None:
    """Shares and compositions, of the phases as they pair best."""
    ours = (split.liquid_fractions[i], split.vapour_fractions[i])
    share = float(split.vapour_share[i])
    pairs = []
    for first, second in ((0, 1), (1, 0)):
        x, y = np.array(theirs.phases[first].zs), np.array(theirs.phases[second].zs)
        pairs.append((np.max(np.abs(x - ours[0])), np.max(np.abs(y - ours[1])), abs(theirs.betas[second] - share)))
    x, y, beta = min(pairs, key=lambda found: found[0] + found[1])
    worst.note("x", x)
    worst.note("y", y)
    worst.note("share", beta)


def _compare_phase(
    fluid: CubicFluid, state: Any, i: int, fractions: Array, library: _LibraryPhase, worst: Worst
) -> None:
    """Volume and departures of a phase; the ideal part is taken off as the fluid has it."""
    model = fluid._equilibria.model
    t, p = float(state.temperature[i]), float(state.pressure[i])
    mass = float(model.molar_masses @ fractions)
    parts = model.ideal.properties(np.array([t]))
    h, s, c = (float(fractions @ part[:, 0]) for part in parts)
    s -= R * (np.log(p / 1e5) + float(np.sum(fractions * np.log(fractions))))
    worst.note("volume", _part(mass * float(state.specific_volume[i]), library.V))
    worst.note("h", _part(mass * float(state.specific_enthalpy[i]) - h, library.H_dep, R * t))
    worst.note("s", _part(mass * float(state.specific_entropy[i]) - s, library.S_dep, R))
    worst.note("c_p", _part(mass * float(state.isobaric_heat_capacity[i]) - c, library.Cp_dep, R))


def main() -> None:
    """Print the table."""
    parser = argparse.ArgumentParser(description=__doc__, formatter_class=argparse.RawDescriptionHelpFormatter)
    parser.add_argument("--states", type=int, default=300, help="states of each fluid")
    count = parser.parse_args().states
    columns = ("volume", "Z", "h", "s", "c_p", "ln φ", "p_sat")
    print(f"{'pure, ' + str(count) + ' states each':<34}" + "".join(f"{name:>10}" for name in columns))
    for name, equation in PURE:
        worst = compare_pure(name, equation, count)
        numbers = "".join(f"{worst.deviations.get(column, np.nan):>10.1e}" for column in columns)
        print(f"{name + ', ' + equation:<34}{numbers}")
    columns = ("volume", "h", "s", "c_p", "Δ ln f", "share", "x", "y")
    print(f"\n{'mixtures, ' + str(count) + ' states each':<34}" + "".join(f"{name:>10}" for name in columns))
    for name in MIXTURES:
        worst = compare_mixture(name, count)
        numbers = "".join(f"{worst.deviations.get(column, np.nan):>10.1e}" for column in columns)
        counts = ", ".join(f"{number} {what}" for what, number in sorted(worst.counts.items()))
        above = worst.deviations.get("G above the library's", 0.0)
        print(f"{name:<34}{numbers}   {counts}; G/RT above the library's where counts differ: {above:.1e}")


if __name__ == "__main__":
    main()
