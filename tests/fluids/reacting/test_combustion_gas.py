"""Products of combustion against independent programs: `cea` (its own data and minimisation) and Cantera (our own
coefficients in its minimisation)."""

from __future__ import annotations

import json
from importlib.resources import files

import cantera
import cea
import numpy as np
import pytest

from reportgen.errors import InputError, RangeError
from reportgen.fluids.gases.gas import ideal_gas
from reportgen.fluids.gases.species import library, resolve
from reportgen.fluids.reacting.products import CombustionGas

FUELS = ("H2", "CO", "CH4", "C3H8", "CH3OH", "NH3")
RATIOS = (0.5, 0.8, 1.0, 1.25, 1.6)
AIR = {"O2": 1.0, "N2": 3.76}
START, PRESSURE = 298.15, 101325.0


def atoms_per_kilogram(composition: dict[str, float]) -> dict[str, float]:
    """Elements [mol/kg] of a gas given by amounts."""
    species = library().species
    mass = sum(amount * species[resolve(key).key].molar_mass for key, amount in composition.items())
    found: dict[str, float] = {}
    for key, amount in composition.items():
        for symbol, count in species[resolve(key).key].atoms.items():
            found[symbol] = found.get(symbol, 0.0) + amount * count / mass
    return found


def air_to_fuel(fuel: str) -> float:
    """Stoichiometric mass of air per mass of fuel."""
    burnt, air = atoms_per_kilogram({fuel: 1.0}), atoms_per_kilogram(AIR)
    needed = 2 * burnt.get("C", 0) + burnt.get("H", 0) / 2 - burnt.get("O", 0)
    return needed / air["O"]


def gas(fuel: str, chemistry: str) -> CombustionGas:
    parents = {"fuel": atoms_per_kilogram({fuel: 1.0}), "air": atoms_per_kilogram(AIR)}
    return CombustionGas("Flue gas", parents, chemistry)  # type: ignore[arg-type]


def shares(fuel: str, ratio: float | np.ndarray) -> dict[str, float | np.ndarray]:
    air = air_to_fuel(fuel) / ratio
    return {"fuel": 1 / (1 + air), "air": air / (1 + air)}


def enthalpy(fuel: str, ratio: float) -> float:
    """Of the unburnt streams [J/kg]."""
    share = shares(fuel, ratio)
    total = sum(AIR.values())
    air = ideal_gas({key: amount / total for key, amount in AIR.items()})
    at = {"pressure": PRESSURE, "temperature": START}
    streams = (ideal_gas(fuel).at(**at), share["fuel"]), (air.at(**at), share["air"])
    return float(sum(state.specific_enthalpy * part for state, part in streams))


def reference(fuel: str, ratio: float) -> cea.EqSolution:
    reactants = cea.Mixture([fuel, "O2", "N2"])
    products = cea.Mixture([fuel, "O2", "N2"], products_from_reactants=True)
    solver = cea.EqSolver(products, reactants=reactants)
    solution = cea.EqSolution(solver)
    fuel_weights = reactants.moles_to_weights(np.array([1.0, 0.0, 0.0]))
    air_weights = reactants.moles_to_weights(np.array([0.0, *AIR.values()]))
    of = reactants.weight_eq_ratio_to_of_ratio(air_weights, fuel_weights, ratio)
    weights = reactants.of_ratio_to_weights(air_weights, fuel_weights, of)
    solver.solve(solution, cea.HP, reactants.calc_property(cea.ENTHALPY, weights, START) / cea.R, 1.01325, weights)
    assert solution.converged
    return solution


@pytest.mark.parametrize("fuel", FUELS)
def test_adiabatic_equilibrium_agrees_with_an_independent_minimisation(fuel: str) -> None:
    """T, s, c_p, c_v and sonic speed at the adiabatic temperature; the program holds several hundred more species."""
    flue = gas(fuel, "equilibrium")
    found = flue.at(
        shares=shares(fuel, np.array(RATIOS)),
        pressure=PRESSURE,
        specific_enthalpy=[enthalpy(fuel, ratio) for ratio in RATIOS],
    )
    for index, ratio in enumerate(RATIOS):
        expected = reference(fuel, ratio)
        assert found.temperature[index] == pytest.approx(expected.T, abs=0.02)
        assert found.specific_entropy[index] == pytest.approx(expected.entropy * 1e3, rel=2e-5)
        assert found.density[index] == pytest.approx(expected.density, rel=2e-5)
        assert found.isobaric_heat_capacity[index] == pytest.approx(expected.cp_eq * 1e3, rel=5e-4)
        assert found.isochoric_heat_capacity[index] == pytest.approx(expected.cv_eq * 1e3, rel=5e-4)


def test_entropy_generated_by_burning_agrees_with_an_independent_minimisation() -> None:
    """s of the products less that of the unburnt, unmixed streams: within 0.1 %, as an engineer would ask."""
    for fuel in FUELS:
        for ratio in RATIOS:
            share = shares(fuel, ratio)
            total = sum(AIR.values())
            air = ideal_gas({key: amount / total for key, amount in AIR.items()})
            at = {"pressure": PRESSURE, "temperature": START}
            before = share["fuel"] * ideal_gas(fuel).at(**at).specific_entropy
            before += share["air"] * air.at(**at).specific_entropy
            state = gas(fuel, "equilibrium").at(
                shares=share, pressure=PRESSURE, specific_enthalpy=enthalpy(fuel, ratio)
            )
            expected = reference(fuel, ratio).entropy * 1e3 - before
            assert state.specific_entropy - before == pytest.approx(expected, rel=1e-4)
            assert expected > 0


def cantera_phase(keys: tuple[str, ...]) -> cantera.Solution:
    """Our coefficients in Cantera."""
    content = json.loads(files("reportgen.fluids.data").joinpath("ideal_gases.json").read_text("utf-8"))
    species = []
    for key in keys:
        entry = content["species"][key]
        breaks = content["temperature_breaks"]
        part = cantera.Species(key, entry["atoms"])
        numbers = [float(len(entry["coefficients"]))]
        for number, coefficients in enumerate(entry["coefficients"]):
            numbers += [breaks[number], breaks[number + 1], *coefficients]
        part.thermo = cantera.Nasa9PolyMultiTempRegion(breaks[0], breaks[-1], content["standard_pressure"], numbers)
        species.append(part)
    return cantera.Solution(thermo="ideal-gas", species=species)


@pytest.mark.parametrize(("fuel", "ratio"), [("CH4", 0.9), ("CH4", 1.4), ("H2", 0.95), ("NH3", 1.2)])
def test_composition_agrees_with_another_method_on_the_same_data(fuel: str, ratio: float) -> None:
    flue = gas(fuel, "equilibrium")
    phase = cantera_phase(flue.species)
    for temperature, pressure in ((700.0, 1e5), (1500.0, 40e5), (2500.0, 1e4), (3500.0, 1e6)):
        share = shares(fuel, ratio)
        amounts = flue.amounts(shares=share, pressure=pressure, temperature=temperature)[0]
        phase.TPX = temperature, pressure, f"{fuel}:{ratio}, O2:{air_oxygen(fuel)}, N2:{3.76 * air_oxygen(fuel)}"
        phase.equilibrate("TP", rtol=1e-13, max_steps=10000)
        fractions = amounts / amounts.sum()
        np.testing.assert_allclose(fractions, phase.X, rtol=2e-5, atol=1e-13)


def air_oxygen(fuel: str) -> float:
    """Amount of O2 that burns one of the fuel."""
    atoms = library().species[resolve(fuel).key].atoms
    return atoms.get("C", 0) + atoms.get("H", 0) / 4 - atoms.get("O", 0) / 2


def test_complete_combustion_is_a_mixture_of_the_usual_products() -> None:
    """Against the ideal-gas model of the composition worked out by hand: CH4 + 2·1.25 (O2 + 3.76 N2)."""
    excess = 1.25
    amounts = {"CO2": 1.0, "H2O": 2.0, "O2": 2 * (excess - 1), "N2": 2 * excess * 3.76}
    total = sum(amounts.values())
    mixture = ideal_gas({key: amount / total for key, amount in amounts.items()})
    flue = gas("CH4", "complete")
    share = shares("CH4", 1 / excess)
    temperatures = np.array([250.0, 298.15, 999.0, 1000.0, 1001.0, 2100.0, 5900.0])
    expected = mixture.at(pressure=2e5, temperature=temperatures)
    for name in ("temperature", "specific_enthalpy", "specific_entropy", "density"):
        found = flue.at(shares=share, pressure=2e5, **{name: getattr(expected, name)})
        for field in ("temperature", "density", "isobaric_heat_capacity", "isochoric_heat_capacity", "speed_of_sound"):
            np.testing.assert_allclose(getattr(found, field), getattr(expected, field), rtol=1e-10)
        for field, scale in (("specific_enthalpy", 1e6), ("specific_entropy", 1e3)):
            np.testing.assert_allclose(getattr(found, field), getattr(expected, field), rtol=1e-10, atol=1e-9 * scale)


@pytest.mark.parametrize("chemistry", ["complete", "equilibrium"])
def test_round_trips(chemistry: str) -> None:
    random = np.random.default_rng(7)
    flue = gas("C3H8", chemistry)
    share = shares("C3H8", random.uniform(0.3, 0.99, 300))
    pressure = np.exp(random.uniform(np.log(1e4), np.log(1e7), 300))
    temperature = random.uniform(300.0, 3500.0, 300)
    state = flue.at(shares=share, pressure=pressure, temperature=temperature)
    for name in ("specific_enthalpy", "specific_entropy", "density"):
        again = flue.at(shares=share, pressure=pressure, **{name: getattr(state, name)})
        np.testing.assert_allclose(again.temperature, temperature, rtol=1e-9)
    # c_p is the slope of h, w² the slope of p against density at constant s
    step = 1e-4
    high = flue.at(shares=share, pressure=pressure, temperature=temperature * (1 + step))
    low = flue.at(shares=share, pressure=pressure, temperature=temperature * (1 - step))
    slope = (high.specific_enthalpy - low.specific_enthalpy) / (2 * step * temperature)
    np.testing.assert_allclose(state.isobaric_heat_capacity, slope, rtol=2e-4)
    high = flue.at(shares=share, pressure=pressure * (1 + step), specific_entropy=state.specific_entropy)
    low = flue.at(shares=share, pressure=pressure * (1 - step), specific_entropy=state.specific_entropy)
    squared = 2 * step * pressure / (high.density - low.density)
    np.testing.assert_allclose(state.speed_of_sound**2, squared, rtol=2e-4)


def test_what_has_no_state_is_refused_with_its_reason() -> None:
    complete, balanced = gas("CH4", "complete"), gas("CH4", "equilibrium")
    rich, lean = shares("CH4", 1.2), shares("CH4", 0.8)
    with pytest.raises(RangeError, match="oxygen does not suffice"):
        complete.at(shares=rich, pressure=1e5, temperature=1500.0)
    with pytest.raises(RangeError, match="no state"):
        balanced.at(shares=lean, pressure=1e5, specific_enthalpy=-1e9)
    with pytest.raises(InputError, match="share"):
        balanced.at(shares={"fuel": 1.0}, pressure=1e5, temperature=1500.0)
    with pytest.raises(InputError, match="elements"):
        CombustionGas("Flue gas", {"fuel": {"C": 80.0, "Si": 1.0}}, "complete")
    masked = complete.at(
        shares={"fuel": [0.03, 0.2, np.nan], "air": 0.97}, pressure=1e5, temperature=1500.0, errors="mask"
    )
    assert np.isfinite(masked.specific_entropy).tolist() == [True, False, False]
    assert list(masked.faults) == [1]
    assert flat_shape(complete, lean) == (2, 3)


def flat_shape(flue: CombustionGas, share: dict[str, float | np.ndarray]) -> tuple[int, ...]:
    state = flue.at(shares=share, pressure=np.full((2, 1), 1e5), temperature=np.linspace(400, 900, 3))
    return state.shape
