"""What a fluid with a cubic equation of state says of itself: title, sources, range, remarks."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from reportgen.fluids.cubics.constants import DATA_FILE, CriticalConstants, carried, digest, rackett_source
from reportgen.fluids.cubics.ideal import IdealPart
from reportgen.fluids.cubics.mixing import Mixture
from reportgen.fluids.gases.gas import IdealGas
from reportgen.fluids.gases.species import DATA_FILE as GAS_FILE
from reportgen.fluids.gases.species import library
from reportgen.fluids.model import Limits, Point
from reportgen.fluids.real import catalogue

__all__ = ["MAXIMUM_PRESSURE", "Description", "describe"]

#: Highest pressure taken [Pa]. Cubic equations come without a range; this one is ours.
MAXIMUM_PRESSURE = 1e8

_FLASH_SOURCES = (
    "Michelsen (1982): The isothermal flash problem, part I: stability, Fluid Phase Equilib. 9, 1-19, "
    "doi:10.1016/0378-3812(82)85001-2; part II: phase-split calculation, 21-40, doi:10.1016/0378-3812(82)85002-4",
)


@dataclass(frozen=True)
class Description:
    """Words and limits of a fluid; ``files`` are names and digests of the data files used."""

    title: str
    substance: str | None
    entropy_zero: str
    sources: tuple[str, ...]
    limits: Limits
    files: tuple[Mapping[str, str], ...]

    def limits_with(self, critical: Point | None) -> Limits:
        """The limits with a critical point [K, Pa, kg/m3]."""
        return replace(self.limits, critical_point=critical)


def describe(
    gas: IdealGas,
    fractions: Mapping[str, float],
    constants: Mapping[str, CriticalConstants],
    mixture: Mixture,
    pairs: Mapping[tuple[str, str], float],
    translated: str | Mapping[str, float] | None,
    ideal: IdealPart,
) -> Description:
    """Description of a fluid.

    Parameters
    ----------
    gas : the same composition as an ideal gas.
    fractions : mole fractions [1] by species key.
    constants : critical constants by species key.
    mixture : the equation.
    pairs : interaction coefficients k_ij [1] by pairs of keys, those given.
    translated : "Peneloux", the translations given [m3/mol] by key, or None.
    ideal : the ideal part.
    """
    form = mixture.form
    if len(fractions) == 1 or gas.substance is not None:
        title = f"{gas.title} ({form.name})"
    else:
        parts = ", ".join(f"{key} {fraction:.4g}" for key, fraction in fractions.items())
        title = f"Mixture of {parts} ({form.name})"
    translation_sources: tuple[str, ...] = ()
    if translated == "Peneloux":
        translation_sources = (f"volume translation: {form.translation_source}", f"Z_RA: {rackett_source()}")
    sources = (
        *form.sources,
        *translation_sources,
        *(line for key in fractions for line in constants[key].sources),
        *(_FLASH_SOURCES if len(fractions) > 1 else ()),
        *gas.sources,
        *(
            f"heat capacity of {key} as an ideal gas below 200 K: {source}"
            for key, (_, source, _) in ideal.cold.items()
        ),
    )
    high = ideal.maximum_temperature
    limits = Limits(
        minimum_temperature=ideal.minimum_temperature,
        maximum_temperature=high,
        maximum_pressure=MAXIMUM_PRESSURE,
        remarks=tuple(_remarks(fractions, mixture, pairs, translated, ideal)),
    )
    return Description(
        title=title,
        substance=gas.substance,
        entropy_zero=gas.entropy_zero,
        sources=sources,
        limits=limits,
        files=tuple(_files(fractions, constants, ideal)),
    )


def _files(
    fractions: Mapping[str, float], constants: Mapping[str, CriticalConstants], ideal: IdealPart
) -> Iterator[Mapping[str, str]]:
    """The ideal gases, the critical constants where carried ones are used, and what the cold ideal part takes."""
    yield {"file": GAS_FILE, "sha256": library().sha256}
    if any(constants[key] == carried().get(key) for key in fractions):
        yield {"file": DATA_FILE, "sha256": digest()}
    for _, _, file in ideal.cold.values():
        yield {"file": file, "sha256": catalogue.digest(file)}


def _remarks(
    fractions: Mapping[str, float],
    mixture: Mixture,
    pairs: Mapping[tuple[str, str], float],
    translated: str | Mapping[str, float] | None,
    ideal: IdealPart,
) -> list[str]:
    form, highest = mixture.form, ideal.maximum_temperature
    found = [
        "The temperatures are those of the ideal-gas part. Cubic equations come without a range of validity; the "
        f"highest pressure, {MAXIMUM_PRESSURE / 1e5:g} bar, is set here.",
        "No triple point and no melting line: that a state is not solid is not checked.",
        f"Attraction: a(T) = a(Tc) [1 + m (1 − √(T/Tc))]² with {form.slope_words}.",
    ]
    if ideal.cold:
        titles = ", ".join(title for title, _, _ in ideal.cold.values())
        found.append(
            f"Below 200 K, where the ideal-gas polynomials end, the heat capacities of the ideal gas are those of the "
            f"published equations of {titles}."
        )
    hottest = _turning(mixture)
    if np.min(hottest) < highest:
        species = list(fractions)[int(np.argmin(hottest))]
        found.append(
            f"Above {np.min(hottest):.0f} K the attraction of {species} in the equation rises again with temperature, "
            "against experience; the gas is nearly ideal there."
        )
    if len(fractions) > 1:
        given = ", ".join(f"{first}–{second} {k:g}" for (first, second), k in pairs.items())
        found.append(
            f"Interaction coefficients k_ij: {given}; 0 for all other pairs."
            if given
            else "Interaction coefficients k_ij: 0 for all pairs."
        )
        found.append("One vapour and one liquid at most: states with a second liquid or a third phase are refused.")
    if translated is None:
        found.append("No volume translation.")
    else:
        shifts = ", ".join(
            f"{key} {shift * 1e6:.4g}" for key, shift in zip(fractions, mixture.translation, strict=True)
        )
        origin = " (Péneloux)" if translated == "Peneloux" else " (given)"
        found.append(
            f"Volume translation c in cm³/mol{origin}: {shifts}. Volumes are lower by Σ x c, enthalpies by Σ x c p; "
            "phase equilibria, entropies and heat capacities do not change."
        )
    return found


def _turning(mixture: Mixture) -> NDArray[np.float64]:
    """Temperatures [K] at which the attraction of each species is zero, infinite where it never is."""
    with np.errstate(divide="ignore"):
        turning = mixture.critical_temperatures * (1.0 + 1.0 / mixture.slopes) ** 2
    result: NDArray[np.float64] = np.where(mixture.slopes > 0.0, turning, np.inf)
    return result
