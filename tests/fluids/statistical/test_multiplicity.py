"""S = k ln Ω: additivity, mixing against enumeration and Stirling's formula, disorder left in a crystal."""

from __future__ import annotations

import itertools
import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from reportgen.errors import InputError
from reportgen.fluids import ideal_gas, statistical
from reportgen.fluids.gases.gas import MOLAR_GAS_CONSTANT
from reportgen.fluids.statistical.sums import BOLTZMANN


@pytest.mark.parametrize("counts", [(3, 2), (4, 0), (2, 2, 2), (1, 1, 1, 1), (5, 1, 2)])
def test_arrangements_are_those_that_can_be_written_down(counts):
    particles = [kind for kind, number in enumerate(counts) for _ in range(number)]
    written = len(set(itertools.permutations(particles)))
    assert math.exp(statistical.log_arrangements(counts)) == pytest.approx(written, rel=1e-12)


def test_a_coin_and_a_die():
    """Independent systems multiply arrangements and add entropies: 2 × 6 = 12."""
    coin, die, both = (statistical.entropy_of_arrangements(math.log(n)) for n in (2, 6, 12))
    assert coin + die == pytest.approx(both, rel=1e-15)
    assert both == pytest.approx(BOLTZMANN * math.log(12.0), rel=1e-15)


@given(st.lists(st.integers(0, 10**6), min_size=1, max_size=5), st.lists(st.integers(0, 10**6), min_size=1, max_size=5))
def test_two_crystals_side_by_side_have_the_sum_of_their_entropies(first, second):
    """Sites that stay apart multiply their arrangements; sites thrown together have at least as many."""
    apart = statistical.log_arrangements(first) + statistical.log_arrangements(second)
    width = max(len(first), len(second))
    sum_of_both = np.pad(first, (0, width - len(first))) + np.pad(second, (0, width - len(second)))
    assert statistical.log_arrangements(sum_of_both) >= apart - 1e-9 * (1.0 + apart)


@pytest.mark.parametrize("fractions", [(0.5, 0.5), (0.79, 0.21), (0.78, 0.21, 0.01)])
def test_counting_tends_to_the_entropy_of_mixing_as_stirling_says(fractions):
    """k ln Ω for N particles, per mole, against −R Σ x ln x less ½ R ln[(2πN)^(n−1) Π x]/N."""
    shares = np.array(fractions)
    previous = math.inf
    for number in (100, 10_000, 1_000_000, 100_000_000):
        counts = np.rint(shares * number)
        counted = MOLAR_GAS_CONSTANT * statistical.log_arrangements(counts) / number
        short = statistical.mixing_entropy(counts / number) - counted
        expected = (
            0.5
            * MOLAR_GAS_CONSTANT
            * math.log((2.0 * math.pi * number) ** (shares.size - 1) * float(np.prod(shares)))
            / number
        )
        assert 0.0 < short < previous
        # Stirling's next term is of the order 1/N of this one, and the difference of large numbers costs digits
        assert short == pytest.approx(expected, rel=12.0 / number, abs=1e-13)
        previous = short


def test_mixing_is_what_the_ideal_gas_mixture_carries():
    """3 kmol O2 and 5 kmol CO2 at 25 °C: 44.0 kJ/K generated (from memory), by counting and by the polynomials."""
    fractions = {"O2": 3.0 / 8.0, "CO2": 5.0 / 8.0}
    mixture = ideal_gas(fractions)
    state = {"temperature": 298.15, "pressure": 1e5}
    mixed = mixture.at(**state).specific_entropy * mixture.molar_mass
    apart = sum(
        share * ideal_gas(name).at(**state).specific_entropy * ideal_gas(name).molar_mass
        for name, share in fractions.items()
    )
    by_counting = statistical.mixing_entropy(list(fractions.values()))
    assert mixed - apart == pytest.approx(by_counting, rel=1e-9)
    assert 8.0 * by_counting == pytest.approx(44.0, abs=0.05)


def test_disorder_left_in_crystalline_carbon_monoxide():
    """Counted entropy of the gas less the calorimetric one lies between half of R ln 2 and R ln 2.

    Calorimetric entropy at 298.1 K and 1 atm, 193.3 J/(mol K): Clayton and Giauque, J. Am. Chem. Soc. 54 (1932) 2610
    (from memory).
    """
    left = statistical.gas("CO").entropy(298.1, 101325.0) - 193.3
    assert 0.5 * statistical.residual_entropy(2) < left < statistical.residual_entropy(2)
    assert statistical.residual_entropy(2) == pytest.approx(5.763, abs=1e-3)
    assert statistical.residual_entropy(1) == 0.0


def test_shapes_and_nan_are_kept():
    counts = np.array([[[1.0, 1.0], [2.0, np.nan]]])
    found = statistical.log_arrangements(counts)
    assert found.shape == (1, 2)
    assert found[0, 0] == pytest.approx(math.log(2.0))
    assert np.isnan(found[0, 1])
    assert np.isnan(statistical.mixing_entropy([np.nan, 0.5]))
    assert statistical.mixing_entropy([1.0, 0.0]) == 0.0


@pytest.mark.parametrize("counts", [[-1, 2], [0.5, 1], 3, [math.inf, 1]])
def test_what_cannot_be_counted_is_refused(counts):
    with pytest.raises(InputError, match="whole numbers"):
        statistical.log_arrangements(counts)


def test_fractions_and_orientations_that_make_no_sense_are_refused():
    for fractions in ([0.5, 0.6], [-0.1, 1.1], 1.0):
        with pytest.raises(InputError, match="add up to 1"):
            statistical.mixing_entropy(fractions)
    with pytest.raises(InputError, match="one orientation"):
        statistical.residual_entropy(0.5)
