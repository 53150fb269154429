"""Combustors in plants: every way round, against `cea` and Cantera, with pieces behind them, and what is refused."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import numpy as np
import pytest

from reportgen import balances, fluids
from reportgen.errors import InputError, SolutionError
from reportgen.evaluation.combustion import entering
from reportgen.fluids.reacting.product_gas import ProductGas
from reportgen.fluids.reacting.products import CANDIDATES
from tests.fluids.reacting.test_combustion_gas import AIR, FUELS, RATIOS, cantera_phase, reference

START, PRESSURE = 298.15, 101325.0
Definition = balances.EquipmentDefinition
AMBIENT = {"surroundings.temperature": START, "surroundings.pressure": PRESSURE}


def air() -> Any:
    total = sum(AIR.values())
    return fluids.ideal_gas({key: amount / total for key, amount in AIR.items()})


def at_start(*states: str, pressure: float = PRESSURE) -> dict[str, float]:
    return {
        f"states.{state}.{name}": value
        for state in states
        for name, value in (("temperature", START), ("pressure", pressure))
    }


def burner(
    fuel: Any,
    chemistry: str = "complete",
    more: Mapping[str, Any] | None = None,
    states: tuple[str, ...] = (),
    oxidant: Any = None,
) -> balances.Plant:
    """Fuel 1 and air 2 become 3; further states are of the flue gas."""
    oxidant = oxidant or air()
    flue = ProductGas("Flue gas", {"1": fuel, "2": oxidant}, chemistry)  # type: ignore[arg-type]
    return balances.Plant(
        {"fuel": fuel, "air": oxidant, "flue": flue},
        {"1": "fuel", "2": "air", "3": "flue", **dict.fromkeys(states, "flue")},
        {"B": Definition("combustor", {"inlets": ("1", "2"), "outlet": ("3",)}), **(more or {})},
    )


def base(solution: balances.Solution) -> dict[str, Any]:
    return {path: array[0] for path, array in solution.values.items()}


@pytest.mark.parametrize("fuel", FUELS)
def test_adiabatic_flames_agree_with_an_independent_program(fuel: str) -> None:
    """Bar: temperature within 0.5 K, entropy generation within 0.1 %; met here with 0.02 K and 1e-4."""
    excess = np.array([1.0 / ratio - 1.0 for ratio in RATIOS])
    given = {**AMBIENT, **at_start("1", "2"), "states.1.mass_flow": 1.0, "equipment.B.excess_air": excess}
    found = balances.solve(burner(fluids.ideal_gas(fuel), "equilibrium"), given).values
    streams = cantera_phase((fuel, "O2", "N2"))
    for index, ratio in enumerate(RATIOS):
        expected = reference(fuel, ratio)
        assert found["states.3.temperature"][index] == pytest.approx(expected.T, abs=0.02)
        whole = found["states.3.mass_flow"][index]
        entropy = 0.0
        for state, model in (("1", fluids.ideal_gas(fuel)), ("2", air())):
            streams.TPX = START, PRESSURE, {fuel: 1.0} if state == "1" else AIR
            molar = streams.entropy_mole / 1e3
            entropy += found[f"states.{state}.mass_flow"][index] * molar / model.molar_mass
        generated = whole * expected.entropy * 1e3 - entropy
        assert found["equipment.B.entropy_generation"][index] == pytest.approx(generated, rel=1e-4)


class Burnt:
    """Moles of gas in Cantera with this program's coefficients; extensive properties for each kilogram given to it."""

    def __init__(self, keys: tuple[str, ...], moles: Mapping[str, float], mass: float) -> None:
        self.phase, self.mass = cantera_phase(keys), mass
        self.phase.TPX = 1500.0, PRESSURE, dict(moles)
        self.scale = sum(moles.values()) * self.phase.mean_molecular_weight  # g of Cantera, its own atomic weights

    def settle(self, pair: str, first: float, second: float) -> Burnt:
        """``first`` an enthalpy or entropy for each kilogram, or a temperature; ``second`` the pressure."""
        value = first if pair == "TP" else first * self.mass / (self.scale * 1e-3)
        if pair == "TP":
            self.phase.TP = value, second
        else:
            # a start of another method: equilibrium at a temperature, then closer by secants
            self._search(pair, value, second)
            return self
        self.phase.equilibrate("TP", rtol=1e-13, max_steps=10000)
        return self

    def _search(self, pair: str, value: float, pressure: float) -> None:
        def gap(temperature: float) -> float:
            self.phase.TP = temperature, pressure
            self.phase.equilibrate("TP", rtol=1e-13, max_steps=10000)
            return float((self.phase.enthalpy_mass if pair == "HP" else self.phase.entropy_mass) - value)

        from scipy.optimize import brentq

        gap(brentq(gap, 400.0, 4000.0, xtol=1e-9, rtol=1e-13))

    @property
    def enthalpy(self) -> float:
        return float(self.phase.enthalpy_mass * self.scale * 1e-3 / self.mass)

    @property
    def entropy(self) -> float:
        return float(self.phase.entropy_mass * self.scale * 1e-3 / self.mass)


def test_a_burner_at_equilibrium_with_turbine_and_cooler_agrees_with_a_script() -> None:
    """Every value within 1e-6; Cantera minimises with this program's coefficients, the balances are written here."""
    fuel_model, air_model = fluids.ideal_gas("CH4"), air()
    pressure, loss, boundary, back, efficiency, fuel_flow, excess = 12e5, -20e3, 600.0, 1.1e5, 0.87, 0.05, 0.15
    pieces = {
        "T": Definition("turbine", {"inlet": ("3",), "outlet": ("4",)}),
        "E": Definition("cooler", {"inlet": ("4",), "outlet": ("5",)}),
    }
    plant = burner(fuel_model, "equilibrium", pieces, ("4", "5"))
    given = {
        **AMBIENT,
        **at_start("1", "2", pressure=pressure),
        "states.1.mass_flow": fuel_flow,
        "equipment.B.excess_air": excess,
        "equipment.B.heat": loss,
        "equipment.B.boundary_temperature": boundary,
        "equipment.B.pressure_drop": 0.4e5,
        "states.4.pressure": back,
        "equipment.T.isentropic_efficiency": efficiency,
        "states.5.temperature": 500.0,
    }
    found = base(balances.solve(plant, given))

    fuel_moles = fuel_flow / fuel_model.molar_mass
    oxygen = 2.0 * (1.0 + excess) * fuel_moles
    moles = {"CH4": fuel_moles, "O2": oxygen, "N2": 3.76 * oxygen}
    air_flow = (oxygen + 3.76 * oxygen) * air_model.molar_mass
    flow = fuel_flow + air_flow
    keys = plant.fluids["flue"].species
    streams = cantera_phase(("CH4", "O2", "N2"))
    enthalpy = entropy = 0.0
    for part in ({"CH4": fuel_moles}, {"O2": oxygen, "N2": 3.76 * oxygen}):
        streams.TPX = START, pressure, part
        enthalpy += streams.enthalpy_mole / 1e3 * sum(part.values())
        entropy += streams.entropy_mole / 1e3 * sum(part.values())
    hot = Burnt(keys, moles, flow).settle("HP", (enthalpy + loss) / flow, pressure - 0.4e5)
    ideal = Burnt(keys, moles, flow).settle("SP", hot.entropy, back)
    h4 = hot.enthalpy - efficiency * (hot.enthalpy - ideal.enthalpy)
    spent = Burnt(keys, moles, flow).settle("HP", h4, back)
    cold = Burnt(keys, moles, flow).settle("TP", 500.0, back)
    adiabatic = Burnt(keys, moles, flow).settle("HP", enthalpy / flow, pressure - 0.4e5)
    expected = {
        "states.2.mass_flow": air_flow,
        "states.3.temperature": hot.phase.T,
        "states.3.specific_enthalpy": hot.enthalpy,
        "states.3.specific_entropy": hot.entropy,
        "states.4.temperature": spent.phase.T,
        "states.4.specific_entropy": spent.entropy,
        "equipment.T.power": flow * (hot.enthalpy - h4),
        "equipment.T.entropy_generation": flow * (spent.entropy - hot.entropy),
        "equipment.E.heat": flow * (cold.enthalpy - h4),
        "equipment.B.entropy_generation": flow * hot.entropy - entropy - loss / boundary,
        "equipment.B.adiabatic_temperature": adiabatic.phase.T,
        "equipment.B.air_ratio": 1.0 + excess,
    }
    for key in ("CO2", "CO", "NO", "OH", "O2"):
        share = hot.phase[key].X[0]
        expected[f"equipment.B.species.{key}.mole_fraction"] = share
        expected[f"equipment.B.species.{key}.dry_mole_fraction"] = share / (1.0 - hot.phase["H2O"].X[0])
    for path, value in expected.items():
        assert found[path] == pytest.approx(value, rel=1e-6), path


WAYS = (
    {"equipment.B.excess_air": 0.5, "states.1.mass_flow": 0.02},
    {"equipment.B.excess_air": 0.5, "states.2.mass_flow": 0.5},
    {"equipment.B.excess_air": 0.5, "states.3.mass_flow": 0.5},
    {"states.1.mass_flow": 0.02, "states.2.mass_flow": 0.5},
    {"states.1.mass_flow": 0.02, "states.3.temperature": 1600.0},
    {"states.2.mass_flow": 0.5, "states.3.temperature": 1600.0},
    {"states.3.mass_flow": 0.5, "states.3.temperature": 1600.0},
    {"states.1.mass_flow": 0.02, "states.3.temperature": 1600.0, "equipment.B.heat": -1e5},
    {"equipment.B.excess_air": 0.5, "states.3.temperature": 1600.0, "equipment.B.heat": -1e5},
    {"equipment.B.excess_air": 0.5, "states.3.temperature": 1600.0, "states.1.mass_flow": 0.02},
    {"equipment.B.excess_air": 0.5, "states.3.volume_flow": 1.2},
    {"equipment.B.excess_air": 0.5, "states.3.molar_flow": 10.0},
)


@pytest.mark.parametrize("chemistry", ["complete", "equilibrium"])
@pytest.mark.parametrize("way", WAYS, ids=lambda way: "+".join(path.split(".", 1)[1] for path in way))
def test_a_burner_is_solved_from_whatever_is_given(way: dict[str, float], chemistry: str) -> None:
    plant = burner(fluids.ideal_gas("CH4"), chemistry)
    found = base(balances.solve(plant, {**AMBIENT, **at_start("1", "2"), **way}))
    fuel, oxidant, flue = (found[f"states.{state}.mass_flow"] for state in "123")
    assert flue == pytest.approx(fuel + oxidant, rel=1e-12)
    moles = fuel / plant.fluids["fuel"].molar_mass, oxidant / plant.fluids["air"].molar_mass
    assert found["equipment.B.air_ratio"] == pytest.approx(moles[1] / 4.76 / (2.0 * moles[0]), rel=1e-9)
    enthalpy = sum(found[f"states.{s}.mass_flow"] * found[f"states.{s}.specific_enthalpy"] for s in "12")
    assert enthalpy + found["equipment.B.heat"] == pytest.approx(flue * found["states.3.specific_enthalpy"], rel=1e-8)
    again = (
        plant.fluids["flue"]
        .of({"1": fuel, "2": oxidant})
        .at(pressure=PRESSURE, specific_enthalpy=found["states.3.specific_enthalpy"])
    )
    assert again.temperature == pytest.approx(found["states.3.temperature"], rel=1e-9)
    for path, value in way.items():
        assert found[path] == value
    if "states.3.molar_flow" in way:
        molar_mass = 1.0 / (again.specific_volume * PRESSURE / (8.31446261815324 * again.temperature))
        assert flue / molar_mass == pytest.approx(10.0, rel=1e-9)


def test_a_mixture_of_fuel_and_air_burns_as_one_stream_and_generates_the_mixing_less() -> None:
    """Premixed: the same flame, and less entropy by that of mixing fuel and air."""
    oxygen = 2.0 * 1.4
    total = 1.0 + 4.76 * oxygen
    mixture = fluids.ideal_gas({"CH4": 1.0 / total, "O2": oxygen / total, "N2": 3.76 * oxygen / total})
    flue = ProductGas("Flue gas", {"1": mixture}, "complete")
    plant = balances.Plant(
        {"mixture": mixture, "flue": flue},
        {"1": "mixture", "3": "flue"},
        {"B": Definition("combustor", {"inlets": ("1",), "outlet": ("3",)})},
    )
    one = balances.solve(plant, {**AMBIENT, **at_start("1"), "states.1.mass_flow": 1.0})
    premixed = base(one)
    apart = balances.solve(
        burner(fluids.ideal_gas("CH4")),
        {**AMBIENT, **at_start("1", "2"), "states.3.mass_flow": 1.0, "equipment.B.excess_air": 0.4},
    )
    assert premixed["equipment.B.excess_air"] == pytest.approx(0.4, rel=1e-12)
    assert premixed["states.3.temperature"] == pytest.approx(apart.values["states.3.temperature"][0], rel=1e-10)
    share = 1.0 / total
    mixing = -8.31446261815324 / mixture.molar_mass * (share * np.log(share) + (1 - share) * np.log(1 - share))
    less = apart.values["equipment.B.entropy_generation"][0] - premixed["equipment.B.entropy_generation"]
    assert less == pytest.approx(mixing, rel=1e-9)
    assert entering(one.pieces["B"]).startswith("Premixed: state 1")
    assert entering(apart.pieces["B"]).startswith("Not premixed: fuel (state 1) and oxidant (state 2)")


def test_a_liquid_fuel_burns_from_its_own_state() -> None:
    """n-Heptane as a liquid: heat given off at 25 °C with all water as vapour is its lower heating value.

    4465 kJ/mol is the usual table value for the liquid (4.4647e6 J/mol from enthalpies of formation −224.2, −393.5 and
    −241.8 kJ/mol), from memory.
    """
    fuel = fluids.real_fluid("n-heptane", reference_state="third-law")
    given = {
        **AMBIENT,
        **at_start("1", "2"),
        "states.1.mass_flow": fuel.molar_mass,
        "equipment.B.excess_air": 0.0,
        "states.3.temperature": START,
    }
    found = base(balances.solve(burner(fuel), given))
    assert found["states.1.phase"] == "liquid"
    assert -found["equipment.B.heat"] == pytest.approx(4465e3, rel=5e-4)
    assert found["equipment.B.lower_heating_value"] * fuel.molar_mass == pytest.approx(
        -found["equipment.B.heat"], rel=1e-9
    )
    assert found["equipment.B.fuel_heat"] == pytest.approx(-found["equipment.B.heat"], rel=1e-9)


def test_flue_gas_that_comes_back_does_not_count_as_a_stream_of_its_own() -> None:
    """Recirculation: cooled flue gas enters again; elements, excess air and the gas at the stack stay the same."""
    pieces = {
        "B": Definition("combustor", {"inlets": ("1", "2", "5"), "outlet": ("3",)}),
        "S": Definition("splitter", {"inlet": ("3",), "outlets": ("4", "6")}),
        "E": Definition("cooler", {"inlet": ("4",), "outlet": ("5",)}),
    }
    plant = burner(fluids.ideal_gas("CH4"), "complete", pieces, ("4", "5", "6"))
    given = {
        **AMBIENT,
        **at_start("1", "2"),
        "states.1.mass_flow": 0.02,
        "equipment.B.excess_air": 0.2,
        "equipment.S.split_fraction": 0.3,
        "states.5.temperature": 500.0,
    }
    found = base(balances.solve(plant, given))
    once = base(balances.solve(burner(fluids.ideal_gas("CH4")), {**given_without(given, "S", "5"), **AMBIENT}))
    assert found["states.6.mass_flow"] == pytest.approx(once["states.3.mass_flow"], rel=1e-10)
    for key in ("O2", "CO2", "H2O"):
        path = f"equipment.B.species.{key}.mole_fraction"
        assert found[path] == pytest.approx(once[path], rel=1e-9)
    assert found["states.3.temperature"] < once["states.3.temperature"] - 200.0
    assert found["total.energy_imbalance"] == pytest.approx(0.0, abs=1e-3)


def given_without(given: Mapping[str, float], *parts: str) -> dict[str, float]:
    return {path: value for path, value in given.items() if not set(path.split(".")) & set(parts)}


def test_a_second_combustor_takes_the_gas_of_the_first() -> None:
    """Rich then lean: what both make together is what one would make of the same streams."""
    fuel, oxidant = fluids.ideal_gas("CH4"), air()
    rich = ProductGas("Rich gas", {"1": fuel, "2": oxidant}, "equilibrium")
    lean = ProductGas("Flue gas", {"3": rich, "4": oxidant}, "equilibrium")
    plant = balances.Plant(
        {"fuel": fuel, "air": oxidant, "rich": rich, "flue": lean},
        {"1": "fuel", "2": "air", "3": "rich", "4": "air", "5": "flue"},
        {
            "B1": Definition("combustor", {"inlets": ("1", "2"), "outlet": ("3",)}),
            "B2": Definition("combustor", {"inlets": ("3", "4"), "outlet": ("5",)}),
        },
    )
    moles = 2.0 * 4.76 / fuel.molar_mass * oxidant.molar_mass  # air for each kilogram of fuel
    given = {**AMBIENT, **at_start("1", "2", "4"), "states.1.mass_flow": 1.0}
    flows = {"equipment.B1.excess_air": -0.3, "states.4.mass_flow": 0.6 * moles}
    found = base(balances.solve(plant, {**given, **flows}))
    once = base(
        balances.solve(
            burner(fuel, "equilibrium"),
            {**AMBIENT, **at_start("1", "2"), "states.1.mass_flow": 1.0, "equipment.B.excess_air": 0.3},
        )
    )
    assert found["states.5.temperature"] == pytest.approx(once["states.3.temperature"], rel=1e-9)
    parts = found["equipment.B1.entropy_generation"] + found["equipment.B2.entropy_generation"]
    assert parts == pytest.approx(once["equipment.B.entropy_generation"], rel=1e-9)
    assert "equipment.B2.air_ratio" not in found
    with pytest.raises(InputError, match="excess air has no meaning"):
        balances.solve(plant, {**given, **flows, "equipment.B2.excess_air": 0.3})


def test_an_exchanger_takes_flue_gas_of_any_composition_along_the_sample_axis() -> None:
    water = fluids.real_fluid("water")
    base_plant = burner(
        fluids.ideal_gas("C3H8"),
        "complete",
        {
            "E": Definition(
                "heat-exchanger",
                {"hot_inlet": ("3",), "hot_outlet": ("4",), "cold_inlet": ("11",), "cold_outlet": ("12",)},
            )
        },
        ("4",),
    )
    plant = balances.Plant(
        {**base_plant.fluids, "water": water}, {**base_plant.states, "11": "water", "12": "water"}, base_plant.equipment
    )
    excess = np.array([0.1, 0.5, 1.0])
    given = {
        **AMBIENT,
        **at_start("1", "2"),
        "states.1.mass_flow": 0.02,
        "equipment.B.excess_air": excess,
        "states.4.temperature": 480.0,
        "states.11.pressure": 10e5,
        "states.11.temperature": 380.0,
        "states.12.pressure": 10e5,
        "states.12.quality": 1.0,
    }
    found = balances.solve(plant, given).values
    for index, value in enumerate(excess):
        alone = base(balances.solve(plant, {**given, "equipment.B.excess_air": value}))
        for name in ("equipment.E.effectiveness", "equipment.E.pinch", "equipment.E.mean_temperature_difference"):
            assert found[name][index] == pytest.approx(alone[name], rel=1e-9)
    split = found["equipment.E.entropy_by_temperature_difference"] + found["equipment.E.entropy_by_pressure_drop"]
    np.testing.assert_allclose(split, found["equipment.E.entropy_generation"], rtol=1e-6)


def test_too_little_oxygen_for_complete_combustion_is_refused_with_the_oxygen_there_is() -> None:
    given = {**AMBIENT, **at_start("1", "2"), "states.1.mass_flow": 0.02, "equipment.B.excess_air": -0.2}
    with pytest.raises(SolutionError) as caught:
        balances.solve(burner(fluids.ideal_gas("CH4")), given)
    (fault,) = caught.value.faults
    assert "there is 80 % of what carbon, hydrogen and sulfur bind" in fault.message
    assert fault.expected == 'more air or less fuel, or chemistry = "equilibrium"'


def test_streams_that_cannot_burn_together_are_refused() -> None:
    fuel = fluids.ideal_gas("CH4")
    with pytest.raises(InputError, match="other zeros") as caught:
        ProductGas("Flue gas", {"1": fluids.real_fluid("n-heptane"), "2": air()}, "complete")
    assert caught.value.faults[0].expected == 'reference_state = "third-law"'
    oil = fluids.incompressible("oil", density=850.0, specific_heat=2000.0, limits=(260.0, 500.0))
    with pytest.raises(InputError, match="cannot take part in a combustion"):
        ProductGas("Flue gas", {"1": oil, "2": air()}, "complete")
    plant = burner(fuel)
    other = balances.Plant({**plant.fluids, "other": air()}, {**plant.states, "3": "other"}, plant.equipment)
    with pytest.raises(InputError, match="makes another fluid than that of state 3"):
        balances.solve(other, {**AMBIENT, **at_start("1", "2"), "states.1.mass_flow": 0.02})


def test_the_gases_of_two_combustors_are_not_one_fluid() -> None:
    fuel, oxidant = fluids.ideal_gas("CH4"), air()
    gases = {
        name: ProductGas(name, {a: fuel, b: oxidant}, "complete") for name, a, b in (("x", "1", "2"), ("y", "4", "5"))
    }
    plant = balances.Plant(
        {"fuel": fuel, "air": oxidant, **gases},
        {"1": "fuel", "2": "air", "3": "x", "4": "fuel", "5": "air", "6": "y", "7": "x"},
        {
            "B1": Definition("combustor", {"inlets": ("1", "2"), "outlet": ("3",)}),
            "B2": Definition("combustor", {"inlets": ("4", "5"), "outlet": ("6",)}),
            "M": Definition("mixer", {"inlets": ("3", "6"), "outlet": ("7",)}),
        },
    )
    with pytest.raises(InputError, match="products of a combustor are a fluid of their own"):
        balances.solve(plant, {**AMBIENT, **at_start("1", "2", "4", "5"), "states.1.mass_flow": 1.0})


def test_the_kind_names_every_species_that_products_may_hold() -> None:
    assert balances.kinds()["combustor"].species == CANDIDATES
