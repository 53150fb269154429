"""Gases mixed by removing a partition: against Cantera, additivity, compositions along the sample axis, refusals."""

from __future__ import annotations

import functools
import math
from typing import Any

import cantera
import numpy as np
import pytest

from reportgen import fluids
from reportgen.errors import InputError
from tests.balances.processes.solved import base, process, solution

N2, O2, AR, CO2 = (fluids.ideal_gas(name) for name in ("N2", "O2", "Ar", "CO2"))
R = 8.31446261815324
#: Molar masses [kg/mol] of this program; Cantera's own are newer for nitrogen, so amounts of substance are compared.
PARTS = {"N2": (N2, 5e5, 300.0, 1.0), "O2": (O2, 2e5, 400.0, 0.5), "Ar": (AR, 1e5, 250.0, 2.0)}


@functools.cache
def cantera_gas() -> cantera.Solution:
    species = {
        item.name: item for file in ("nasa_gas.yaml", "airNASA9.yaml") for item in cantera.Species.list_from_file(file)
    }
    return cantera.Solution(thermo="ideal-gas", species=[species[name] for name in ("N2", "O2", "Ar")])


def three_gases(without: str = "", **changed: Any) -> Any:
    """Nitrogen, oxygen and argon at different pressures and temperatures, let together; one given left out."""
    amounts = {name: p * v / (R * t) for name, (_, p, t, v) in PARTS.items()}
    total = sum(amounts.values())
    mixture = fluids.ideal_gas({name: amount / total for name, amount in amounts.items()})
    givens: dict[str, Any] = {}
    for name, (_, pressure, temperature, volume) in PARTS.items():
        givens |= {
            f"states.{name}.pressure": pressure,
            f"states.{name}.temperature": temperature,
            f"states.{name}.volume": volume,
        }
    givens.pop(without, None)
    gases = {name: gas for name, (gas, *_) in PARTS.items()}
    return solution(
        {**gases, "mix": mixture},
        {**{name: name for name in PARTS}, "end": "mix"},
        {"P": process("partition-removal", tuple(PARTS), "end")},
        {**givens, **changed},
    )


def test_three_gases_against_cantera() -> None:
    found = base(three_gases())
    gas = cantera_gas()
    amounts, energy, entropy, volume = {}, 0.0, 0.0, 0.0
    for name, (_, pressure, temperature, part) in PARTS.items():
        gas.TPX = temperature, pressure, {name: 1.0}
        amounts[name] = pressure * part / (cantera.gas_constant * temperature)
        energy += amounts[name] * gas.int_energy_mole
        entropy += amounts[name] * gas.entropy_mole
        volume += part
    total = sum(amounts.values())
    gas.TPX = 300.0, 1e5, amounts
    gas.UV = energy / total / gas.mean_molecular_weight, volume / total / gas.mean_molecular_weight
    assert found["states.end.temperature"] == pytest.approx(gas.T, rel=1e-6)
    assert found["states.end.pressure"] == pytest.approx(gas.P, rel=1e-6)
    assert found["processes.P.entropy_generation"] == pytest.approx(total * gas.entropy_mole - entropy, rel=1e-6)
    assert found["processes.P.lost_work"] == pytest.approx(288.15 * found["processes.P.entropy_generation"], rel=1e-12)
    for name, amount in amounts.items():
        share = found[f"processes.P.species.{name}.mole_fraction"]
        assert share == pytest.approx(amount / total, rel=1e-9)
    mixing = -cantera.gas_constant * sum(n * math.log(n / total) for n in amounts.values())
    assert found["processes.P.entropy_of_mixing"] == pytest.approx(mixing, rel=1e-9)
    assert found["processes.P.energy_imbalance"] == pytest.approx(0.0, abs=1e-9 * abs(energy))


def test_identical_gases_have_no_entropy_of_mixing() -> None:
    """Of one temperature and pressure: nothing happens (Gibbs). As soon as one of them is another gas, R Σ n ln 2."""
    givens = {}
    for state in ("a", "b"):
        givens |= {f"states.{state}.pressure": 2e5, f"states.{state}.temperature": 300.0, f"states.{state}.volume": 1.0}
    ends = process("partition-removal", ("a", "b"), "c")
    same = base(solution({"g": N2}, {"a": "g", "b": "g", "c": "g"}, {"P": ends}, givens))
    assert same["processes.P.entropy_generation"] == pytest.approx(0.0, abs=1e-9)
    half = fluids.ideal_gas({"N2": 0.5, "O2": 0.5})
    other = base(solution({"g": N2, "o": O2, "h": half}, {"a": "g", "b": "o", "c": "h"}, {"P": ends}, givens))
    amount = 2e5 * 2.0 / (R * 300.0)
    assert other["processes.P.entropy_generation"] == pytest.approx(amount * R * math.log(2.0), rel=1e-9)
    assert other["states.c.temperature"] == pytest.approx(300.0, rel=1e-12)


def test_mixtures_that_share_species() -> None:
    """Air and nitrogen: what counts is species by species; the entropy of mixing is below that of strangers."""
    air = fluids.ideal_gas({"N2": 0.79, "O2": 0.21})
    amounts = {"air": 1.0, "n": 2.0}
    species = {"N2": (0.79 + 2.0) / 3.0, "O2": 0.21 / 3.0}
    givens = {
        "states.a.pressure": 1e5,
        "states.a.temperature": 300.0,
        "states.a.mass": amounts["air"] * air.molar_mass,
        "states.b.pressure": 1e5,
        "states.b.temperature": 300.0,
        "states.b.mass": amounts["n"] * N2.molar_mass,
    }
    found = base(
        solution(
            {"air": air, "n": N2, "mix": fluids.ideal_gas(species)},
            {"a": "air", "b": "n", "c": "mix"},
            {"P": process("partition-removal", ("a", "b"), "c")},
            givens,
        )
    )
    expected = -R * (
        0.79 * math.log(species["N2"] / 0.79) + 0.21 * math.log(species["O2"] / 0.21) + 2.0 * math.log(species["N2"])
    )
    assert found["processes.P.entropy_of_mixing"] == pytest.approx(expected, rel=1e-9)
    assert found["processes.P.entropy_generation"] == pytest.approx(expected, rel=1e-7)


def test_the_composition_follows_the_masses_along_the_sample_axis() -> None:
    """A volume that differs changes its column as a solution of its own does: composition, temperature, pressure."""
    volumes = [1.0, 1.03, 0.97]
    axis = three_gases(**{"states.N2.volume": volumes})
    for column, volume in enumerate(volumes):
        parts = {**{name: (p, t, v) for name, (_, p, t, v) in PARTS.items()}, "N2": (5e5, 300.0, volume)}
        amounts = {name: p * v / (R * t) for name, (p, t, v) in parts.items()}
        total = sum(amounts.values())
        model = fluids.ideal_gas({name: amount / total for name, amount in amounts.items()})
        energy = sum(
            p * v / (R * t) * gas.molar_mass * float(gas.at(pressure=p, temperature=t).specific_internal_energy)
            for (p, t, v), (gas, *_) in zip(parts.values(), PARTS.values(), strict=True)
        )
        mass = total * model.molar_mass
        end = model.at(specific_internal_energy=energy / mass, density=mass / (volume + 2.5))
        for name in ("temperature", "pressure", "specific_entropy", "specific_enthalpy", "density"):
            found = axis.values[f"states.end.{name}"][column]
            assert found == pytest.approx(float(getattr(end, name)), rel=1e-9), (name, column)


def test_a_mixture_goes_on_into_further_processes() -> None:
    """A second filling with nitrogen: the mixture of a mixture, and its cooling, column by column."""

    def purge(volume: list[float]) -> Any:
        first, second = fluids.ideal_gas({"O2": 0.3333, "N2": 0.6667}), fluids.ideal_gas({"O2": 0.2, "N2": 0.8})
        givens: dict[str, Any] = {}
        for state, pressure, size in (("a", 1e5, volume), ("b", 2e5, 1.0), ("d", 2e5, 1.0)):
            givens |= {
                f"states.{state}.pressure": pressure,
                f"states.{state}.temperature": 300.0,
                f"states.{state}.volume": size,
            }
        return solution(
            {"o": O2, "n": N2, "m": first, "mm": second},
            {"a": "o", "b": "n", "c": "m", "d": "n", "e": "mm", "f": "mm"},
            {
                "P": process("partition-removal", ("a", "b"), "c"),
                "Q": process("partition-removal", ("c", "d"), "e"),
                "C": process("isochoric", "e", "f"),
            },
            {**givens, "states.f.temperature": 290.0},
        )

    axis = purge([1.0, 1.002])
    for column, volume in enumerate((1.0, 1.002)):
        oxygen, nitrogen = 1e5 * volume / (R * 300.0), 4e5 / (R * 300.0)
        share = axis.values["processes.Q.species.O2.mole_fraction"][column]
        assert share == pytest.approx(oxygen / (oxygen + nitrogen), rel=1e-9)
        pressure = axis.values["states.f.pressure"][column]
        assert pressure == pytest.approx((oxygen + nitrogen) * R * 290.0 / (2.0 + volume), rel=1e-9)
        heat = axis.values["processes.C.heat"][column]
        drop = sum(
            n
            * gas.molar_mass
            * float(np.diff(gas.at(pressure=1e5, temperature=[300.0, 290.0]).specific_internal_energy)[0])
            for gas, n in ((O2, oxygen), (N2, nitrogen))
        )
        assert heat == pytest.approx(drop, rel=1e-9)
    parts = [float(axis.values[f"processes.{tag}.entropy_generation"][0]) for tag in "PQC"]
    assert float(axis.values["total.entropy_generation"][0]) == pytest.approx(sum(parts), rel=1e-12)
    assert abs(axis.values["total.closure"]).max() < 1e-9 * float(axis.values["states.e.entropy"][0])


def test_the_volume_of_one_part_is_found_from_the_pressure_in_the_end() -> None:
    done = base(three_gases())
    solved = base(three_gases(without="states.Ar.volume", **{"states.end.pressure": done["states.end.pressure"]}))
    assert solved["states.Ar.volume"] == pytest.approx(2.0, rel=1e-8)


TWO = {
    "states.a.pressure": 1e5,
    "states.a.temperature": 300.0,
    "states.a.volume": 1.0,
    "states.b.pressure": 1e5,
    "states.b.temperature": 300.0,
    "states.b.volume": 1.0,
}


def refused(first: Any, second: Any, mixture: Any) -> str:
    with pytest.raises(InputError) as caught:
        solution(
            {"x": first, "y": second, "m": mixture},
            {"a": "x", "b": "y", "c": "m"},
            {"P": process("partition-removal", ("a", "b"), "c")},
            TWO,
        )
    return str(caught.value)


def test_a_stated_composition_that_does_not_follow_is_refused_with_the_one_that_does() -> None:
    told = refused(N2, O2, fluids.ideal_gas({"N2": 0.6, "O2": 0.4}))
    assert "fluids.m.composition" in told
    assert "N2 = 0.50000" in told
    assert "N2 = 0.60000" in told


def test_a_mixture_of_other_species_is_refused() -> None:
    assert "makes a mixture of N2, O2" in refused(N2, O2, fluids.ideal_gas({"N2": 0.5, "Ar": 0.5}))


def test_constant_and_variable_heat_capacities_are_not_mixed() -> None:
    told = refused(fluids.ideal_gas("N2", heat_capacity=1040.0), O2, fluids.ideal_gas({"N2": 0.5, "O2": 0.5}))
    assert "constant heat capacity" in told


def test_real_fluids_are_not_mixed_and_both_zeros_are_named() -> None:
    ammonia = fluids.real_fluid("ammonia")
    told = refused(ammonia, fluids.real_fluid("ammonia", reference_state="IIR"), ammonia)
    assert "different zeros" in told
    assert "published:ammonia" in told
    assert "IIR" in told


def test_one_mixture_is_made_once() -> None:
    half = fluids.ideal_gas({"N2": 0.5, "O2": 0.5})
    with pytest.raises(InputError, match="already made by"):
        solution(
            {"x": N2, "y": O2, "m": half},
            {"a": "x", "b": "y", "c": "m", "d": "x", "e": "y", "f": "m"},
            {
                "P": process("partition-removal", ("a", "b"), "c"),
                "Q": process("partition-removal", ("d", "e"), "f"),
            },
            TWO,
        )


def test_wet_and_superheated_steam_let_together() -> None:
    """One real fluid on both sides: masses, volumes and internal energies add up."""
    water = fluids.real_fluid("water")
    givens = {
        "states.a.pressure": 20e5,
        "states.a.temperature": 573.15,
        "states.a.volume": 1.0,
        "states.b.pressure": 1e5,
        "states.b.quality": 0.3,
        "states.b.volume": 0.5,
    }
    found = base(
        solution(
            {"w": water}, {"a": "w", "b": "w", "c": "w"}, {"P": process("partition-removal", ("a", "b"), "c")}, givens
        )
    )
    from CoolProp.CoolProp import PropsSI

    def steam(output: str, *pair: Any) -> float:
        return float(PropsSI(output, *pair, "Water"))

    sides = [("P", 20e5, "T", 573.15), ("P", 1e5, "Q", 0.3)]
    masses = [volume * steam("D", *side) for volume, side in zip((1.0, 0.5), sides, strict=True)]
    energy = sum(mass * steam("U", *side) for mass, side in zip(masses, sides, strict=True))
    end = ("D", sum(masses) / 1.5, "U", energy / sum(masses))
    assert found["states.c.temperature"] == pytest.approx(steam("T", *end), rel=1e-6)
    assert found["states.c.pressure"] == pytest.approx(steam("P", *end), rel=1e-6)
    entropy = sum(mass * steam("S", *side) for mass, side in zip(masses, sides, strict=True))
    assert found["processes.P.entropy_generation"] == pytest.approx(sum(masses) * steam("S", *end) - entropy, rel=1e-6)
