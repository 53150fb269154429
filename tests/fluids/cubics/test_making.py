"""A cubic fluid from names: what is taken, what is refused, what it says of itself."""

from __future__ import annotations

import hashlib
from pathlib import Path

import numpy as np
import pytest

import reportgen
from reportgen import fluids
from reportgen.errors import InputError
from reportgen.fluids.model import Fluid

DATA = Path(reportgen.__file__).parent / "fluids" / "data"


def test_a_substance_tells_what_it_is() -> None:
    fluid = fluids.cubic("CO2")
    assert isinstance(fluid, Fluid)
    assert (fluid.kind, fluid.substance, fluid.composition) == ("cubic", "carbon dioxide", None)
    assert fluid.title == "Carbon dioxide (Peng-Robinson)"
    assert fluid.entropy_zero_name == "third-law"
    assert fluid.entropy_zero == fluids.ideal_gas("CO2").entropy_zero
    assert fluid.limits.triple_point is None
    assert fluid.limits.maximum_pressure == 1e8
    assert fluid.limits.critical_point is not None
    sources = "\n".join(fluid.sources)
    for doi in ("10.1021/i160057a011", "10.1063/1.555991", "NASA/TP-2002-211556"):
        assert doi in sources
    remarks = "\n".join(fluid.limits.remarks)
    for words in ("without a range of validity", "not solid is not checked", "1978", "No volume translation"):
        assert words in remarks


def test_a_mixture_lists_its_coefficients_translation_and_sources() -> None:
    fluid = fluids.cubic(
        {"CO2": 0.6, "nitrogen": 0.4},
        equation="Soave-Redlich-Kwong",
        interaction={("N2", "CO2"): -0.03},
        volume_translation="Peneloux",
    )
    assert fluid.composition == {"CO2": 0.6, "N2": 0.4}
    assert fluid.substance is None
    remarks = "\n".join(fluid.limits.remarks)
    assert "N2–CO2 -0.03; 0 for all other pairs" in remarks
    assert "(Péneloux): CO2" in remarks
    sources = "\n".join(fluid.sources)
    for doi in (
        "10.1016/0009-2509(72)80096-4",
        "10.1016/0378-3812(82)80002-2",
        "10.1016/0378-3812(82)85001-2",
        "82)85002-4",
    ):
        assert doi in sources


def test_digests_of_the_data_files_are_those_of_their_bytes() -> None:
    for entry in fluids.cubic({"CO2": 0.6, "N2": 0.4}).data_files:
        raw = (DATA / entry["file"]).read_bytes().replace(b"\r\n", b"\n")
        assert hashlib.sha256(raw).hexdigest() == entry["sha256"]
    given = {"CO2": {"temperature": 304.0, "pressure": 7.4e6, "acentric_factor": 0.2}}
    assert "critical_constants.json" not in {entry["file"] for entry in fluids.cubic("CO2", critical=given).data_files}


def test_fractions_of_mass_and_of_amount_are_the_same_fluid() -> None:
    mole = fluids.cubic({"CH4": 0.5, "C3H8": 0.5})
    masses = {key: 0.5 * fluids.ideal_gas(key).molar_mass / mole.molar_mass for key in ("CH4", "C3H8")}
    mass = fluids.cubic(masses, basis="mass")
    state = {"temperature": 250.0, "pressure": 2e6}
    assert mass.at(**state).specific_entropy == pytest.approx(mole.at(**state).specific_entropy, rel=1e-12)


def test_a_coefficient_counts_the_same_from_either_side() -> None:
    one = fluids.cubic({"CO2": 0.5, "CH4": 0.5}, interaction={("CO2", "CH4"): 0.1})
    two = fluids.cubic({"CO2": 0.5, "CH4": 0.5}, interaction={("methane", "carbon dioxide"): 0.1})
    without = fluids.cubic({"CO2": 0.5, "CH4": 0.5})
    state = {"temperature": 250.0, "pressure": 3e6}
    assert one.at(**state).density == two.at(**state).density
    assert one.at(**state).density != without.at(**state).density


@pytest.mark.parametrize(
    ("arguments", "said"),
    [
        ({"substance_or_composition": "propan"}, "Nearest"),
        ({"substance_or_composition": {"CO2": 0.5, "N2": 0.4}}, "do not add up to 1"),
        ({"equation": "Peng-Robinsson"}, "Nearest: Peng-Robinson"),
        ({"interaction": {("CO2", "CO"): 0.1}}, "not in the composition"),
        ({"interaction": {("CO2", "nitrogn"): 0.1}}, "Nearest"),
        ({"interaction": {("CO2", "CO2"): 0.1}}, "with itself"),
        ({"interaction": {("CO2", "N2"): 0.1, ("N2", "CO2"): 0.2}}, "given twice"),
        ({"interaction": {("CO2", "N2"): 7.0}}, "cannot be meant"),
        ({"interaction": {"CO2-N2": 0.1}}, "pairs of species"),
        ({"volume_translation": "Peneloux 1982"}, "not known"),
        ({"volume_translation": {"CO2": 1.0}}, "cannot be meant"),
        ({"volume_translation": {"Ar": 1e-6}}, "not in the composition"),
        ({"basis": "volume"}, "basis"),
    ],
)
def test_mistakes_are_refused_with_what_would_do(arguments: dict, said: str) -> None:
    given = {"substance_or_composition": {"CO2": 0.5, "N2": 0.5}} | arguments
    with pytest.raises(InputError, match=said):
        fluids.cubic(given.pop("substance_or_composition"), **given)


def test_all_mistakes_are_told_at_once() -> None:
    with pytest.raises(InputError) as caught:
        fluids.cubic("CO2", equation="?", interaction={("CO2", "N2"): 0.1}, critical={"CO2": {}})
    assert len(caught.value.faults) == 5


def test_thin_gases_are_ideal_with_the_same_zeros() -> None:
    for composition in ("air", {"CO2": 0.3, "H2O": 0.1, "N2": 0.6}, "CH4"):
        cubic, ideal = fluids.cubic(composition), fluids.ideal_gas(composition)
        pair = {"temperature": np.array([250.0, 400.0, 900.0]), "pressure": 10.0}
        one, two = cubic.at(**pair), ideal.at(**pair)
        np.testing.assert_allclose(one.specific_enthalpy, two.specific_enthalpy, atol=1.0)
        np.testing.assert_allclose(one.specific_entropy, two.specific_entropy, rtol=1e-7)
        np.testing.assert_allclose(one.isobaric_heat_capacity, two.isobaric_heat_capacity, rtol=1e-5)
        assert cubic.entropy_zero_name == ideal.entropy_zero_name


def test_the_cold_ideal_part_joins_without_a_step() -> None:
    """Below 200 K heat capacities come from the published equations: h and s go on, c_p nearly."""
    for composition in ("CH4", "N2", {"CH4": 0.9, "C2H6": 0.1}):
        fluid = fluids.cubic(composition)
        assert fluid.limits.minimum_temperature < 100.0
        below, above = (fluid.at(temperature=200.0 * (1.0 + step), pressure=1e3) for step in (-1e-9, 1e-9))
        assert above.specific_enthalpy - below.specific_enthalpy == pytest.approx(
            4e-7 * below.isobaric_heat_capacity, rel=1e-2
        )
        assert above.specific_entropy == pytest.approx(below.specific_entropy, rel=1e-9)
        assert above.isobaric_heat_capacity == pytest.approx(below.isobaric_heat_capacity, rel=2e-2)
        assert "Below 200 K" in "\n".join(fluid.limits.remarks)
    # methane's published ideal part at 120 K: c_p° = 33.28 J/(mol K) (Setzmann and Wagner 1991, computed)
    methane = fluids.cubic("CH4")
    thin = methane.at(temperature=120.0, pressure=1.0).isobaric_heat_capacity * methane.molar_mass
    assert thin == pytest.approx(33.28, abs=0.01)
    # nothing published is carried for ozone in the cold
    assert fluids.cubic("O3").limits.minimum_temperature == 200.0


@pytest.mark.parametrize(
    ("options", "said"),
    [
        ({"interaction": [("CO2", "N2", 0.1)]}, "by pairs of species"),
        ({"interaction": "CO2"}, "by pairs of species"),
        ({"interaction": {("CO2", "N2"): "0.1"}}, "cannot be meant"),
        ({"volume_translation": 3}, "by species"),
        ({"volume_translation": [1e-6, 2e-6]}, "by species"),
        ({"volume_translation": {"CO2": "1e-6"}}, "cannot be meant"),
        ({"critical": "304 K"}, "given by species"),
        ({"critical": [304.0, 73e5, 0.2]}, "given by species"),
        ({"critical": {"CO2": {"temperature": "304", "pressure": 73e5, "acentric_factor": 0.2}}}, "cannot be meant"),
    ],
)
def test_tables_of_another_form_are_refused(options, said) -> None:
    with pytest.raises(InputError, match=said):
        fluids.cubic({"CO2": 0.6, "N2": 0.4}, **options)


def test_numbers_of_numpy_are_numbers() -> None:
    def made(number):
        return fluids.cubic(
            {"CO2": number(0.5), "N2": number(0.5)},
            interaction={("CO2", "N2"): number(0.125)},
            volume_translation={"CO2": number(2.0**-20)},
            critical={
                "CO2": {"temperature": number(304.0), "pressure": number(7380000), "acentric_factor": number(0.25)}
            },
        )

    expected = made(float).at(pressure=1e6, temperature=300.0).density
    for number in (np.float32, np.float64, np.array):
        assert made(number).at(pressure=1e6, temperature=300.0).density == expected
