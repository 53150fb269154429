"""The glossary: complete, of one mind about dimensions, and clear about signs."""

from __future__ import annotations

import re

import pytest

from reportgen.balances.kinds import kinds, process_kinds, vessel_kinds
from reportgen.fluids.state import FIELDS
from reportgen.names import AMOUNTS, DIMENSIONS, NAMES, name_of, symbol_of
from reportgen.quantities import Display, parse, usual_units
from reportgen.spec.schema import STATE_KEYS

#: Results that the design of the paths promises for states and for pieces of equipment.
STATES = (
    "temperature",
    "pressure",
    "specific_enthalpy",
    "specific_entropy",
    "density",
    "specific_volume",
    "specific_internal_energy",
    "quality",
    "compressibility_factor",
    "isobaric_heat_capacity",
    "speed_of_sound",
    "mass_flow",
    "mass",
    "specific_exergy",
)
EQUIPMENT = (
    "power",
    "heat",
    "entropy_generation",
    "lost_work",
    "isentropic_efficiency",
    "polytropic_efficiency",
    "pressure_ratio",
    "exergetic_efficiency",
    "entropy_generation_number",
    "energy_imbalance",
    "mass_imbalance",
    "entropy_with_heat",
    "closure",
)
#: The same for processes of closed systems.
PROCESSES = (
    "heat",
    "work",
    "entropy_change",
    "entropy_with_heat",
    "entropy_generation",
    "lost_work",
    "energy_imbalance",
    "mass_imbalance",
    "closure",
)


def test_every_promised_name_is_there() -> None:
    numbers = [field for field in FIELDS if field != "phase"]  # the phase is a word
    for name in (*STATES, *EQUIPMENT, *PROCESSES, *STATE_KEYS, *numbers):
        assert name in NAMES, name


def test_parameters_have_the_dimension_of_the_glossary() -> None:
    for kind in (*kinds().values(), *vessel_kinds().values()):
        for parameter in (*kind.parameters, *(inner for group in kind.groups for inner in group.parameters)):
            assert NAMES[parameter.name].dimension == parameter.dimension, (kind.name, parameter.name)


def test_keys_symbols_and_dimensions() -> None:
    for key, entry in NAMES.items():
        assert key == entry.key
        assert re.fullmatch(r"[a-z]+(_[a-z0-9]+)*", key)
        assert entry.unit == DIMENSIONS[entry.dimension]
        assert entry.symbol.count("{") == entry.symbol.count("}")
        assert entry.text[0].isupper()
        assert not entry.text.endswith(".")
    assert {entry.dimension for entry in NAMES.values()} <= DIMENSIONS.keys()


def test_symbols_are_told_apart_within_one_owner() -> None:
    """Volume (closed systems) and velocity share V, vapour fraction and mole fraction x, as in the standards; no piece,
    stream or mixture has both.
    """
    owners: dict[str, list[str]] = {}
    for entry in NAMES.values():
        owners.setdefault(entry.symbol, []).append(entry.key)
    assert [keys for keys in owners.values() if len(keys) > 1] == [["quality", "mole_fraction"], ["volume", "velocity"]]


def test_symbols_of_a_process_are_told_apart() -> None:
    closed = [*AMOUNTS.values(), *(NAMES[name] for name in PROCESSES if name not in AMOUNTS)]
    assert len({entry.symbol for entry in closed}) == len(closed)


def test_a_process_has_amounts_where_equipment_has_rates() -> None:
    assert name_of("processes.P1.heat").dimension == "energy"
    assert name_of("equipment.P1.heat").dimension == "heat_flow"
    assert name_of("closed.lost_work").dimension == "energy"
    assert name_of("total.lost_work").dimension == "power"
    assert name_of("total.lost_work", amounts=True).dimension == "energy"
    assert symbol_of("processes.P1.heat") == r"Q_{\mathrm{P1}}"
    assert symbol_of("total.heat", amounts=True) == r"Q_{\mathrm{total}}"
    assert symbol_of("processes.P2.species.N2.mole_fraction") == r"x_{\mathrm{P2},\mathrm{N2}}"
    for kind in process_kinds().values():
        for parameter in (*kind.parameters, *(inner for group in kind.groups for inner in group.parameters)):
            assert name_of(parameter.name, amounts=True).dimension == parameter.dimension, (kind.name, parameter.name)


@pytest.mark.parametrize(
    "key",
    [
        "power",
        "heat",
        "duty",
        "entropy_with_heat",
        "entropy_generation",
        "lost_work",
        "pressure_drop",
        "hot_pressure_drop",
        "cold_pressure_drop",
        "mass_flow",
        "molar_flow",
        "volume_flow",
        "superheat",
        "subcooling",
        "elevation",
        "energy_imbalance",
        "mass_imbalance",
    ],
)
def test_names_that_could_be_read_with_either_sign_say_theirs(key: str) -> None:
    assert NAMES[key].sign


@pytest.mark.parametrize("dimension", DIMENSIONS)
def test_every_dimension_can_be_read_and_shown(dimension: str) -> None:
    for unit in usual_units(dimension):
        quantity = parse(f"0.5 {unit}", dimension, atmosphere=101_325.0)
        assert quantity.unit == DIMENSIONS[quantity.dimension]
        for system in ("SI", "US"):
            assert Display(system).show(quantity.value, quantity.dimension).number not in ("", "—")


def test_paths() -> None:
    assert name_of("states.2.specific_entropy") is NAMES["specific_entropy"]
    assert name_of("states.2.colour") is None
    assert symbol_of("states.2.specific_entropy") == r"s_{\mathrm{2}}"
    assert symbol_of("equipment.PRV-3.entropy_generation") == r"\dot S_{\mathrm{gen},\mathrm{PRV-3}}"
    assert symbol_of("surroundings.temperature") == "T_{0}"
    assert symbol_of("total.lost_work") == r"\dot W_{\mathrm{lost},\mathrm{total}}"
    assert symbol_of("states.2.colour_code") == r"\mathrm{colour\ code}"
