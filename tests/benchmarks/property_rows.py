"""Rows of the table of property_table.py: what was found for one fluid and pair, and how rows add up."""

from __future__ import annotations

from collections import Counter
from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Any

import numpy as np
from numpy.typing import NDArray

from tests.benchmarks.property_explanations import BARS, Criticals
from tests.benchmarks.property_states import NEAR_CRITICAL, Reference

__all__ = ["HEADING", "Row"]

Array = NDArray[Any]

_SHOWN = {
    "density": "rho",
    "specific_enthalpy": "h",
    "specific_entropy": "s",
    "specific_internal_energy": "u",
    "isobaric_heat_capacity": "c_p",
    "speed_of_sound": "w",
}
HEADING = (
    f"{'worst / 99.9 % of':34s}   used  "
    + "".join(f"{name:^16s}" for name in _SHOWN.values())
    + "  away: worst of those without a reason and not next to critical"
)


@dataclass
class Row:
    """Result for one fluid and pair.

    ``worst`` and ``high`` (99.9 %) are deviations by property; ``away`` the worst of those without a reason where
    |T/Tc − 1| > 1e-3. ``failures`` are exceptions; ``lost`` are refusals without a good reason.
    """

    states: int = 0
    compared: int = 0
    worst: dict[str, float] = field(default_factory=dict)
    high: dict[str, float] = field(default_factory=dict)
    away: dict[str, float] = field(default_factory=dict)
    refused: Counter[str] = field(default_factory=Counter)
    lost: Counter[str] = field(default_factory=Counter)
    reasons: Counter[str] = field(default_factory=Counter)
    unexplained: int = 0
    wrong_phase: int = 0
    failures: Counter[str] = field(default_factory=Counter)
    library_failures: int = 0
    samples: list[str] = field(default_factory=list)
    seconds: float = 0.0

    @property
    def good(self) -> bool:
        """Whether nothing is left without a reason."""
        return not (self.unexplained or self.wrong_phase or self.lost or self.failures)

    def measure(
        self, found: Mapping[str, Array], used: Array, reference: Reference, criticals: Criticals, explained: Array
    ) -> None:
        """Take the statistics of deviations by property, over the states used."""
        away = used & ~explained
        for critical in criticals.temperature:
            away &= np.abs(reference.temperature / critical - 1) > NEAR_CRITICAL
        for name in BARS:
            values = found[name]
            known = np.isfinite(values)
            kept = values[used & known]
            if kept.size:
                self.worst[name] = float(kept.max())
                self.high[name] = float(np.quantile(kept, 0.999))
            self.away[name] = float(values[away & known].max(initial=0.0))

    def add(self, other: Row) -> None:
        """Another row: counts are summed, deviations are the larger ones."""
        for name, value in vars(other).items():
            mine = getattr(self, name)
            if isinstance(value, Counter):
                mine.update(value)
            elif isinstance(value, dict):
                for key, number in value.items():
                    mine[key] = max(mine.get(key, 0.0), number)
            elif isinstance(value, (int, float)):
                setattr(self, name, mine + value)

    def __str__(self) -> str:
        numbers = "".join(
            f" {self.worst.get(name, np.nan):7.0e}/{self.high.get(name, np.nan):6.0e} " for name in _SHOWN
        )
        small = max((self.away.get(name, 0.0) for name, bar in BARS.items() if bar < 1e-6), default=0.0)
        slopes = max((self.away.get(name, 0.0) for name, bar in BARS.items() if bar > 1e-6), default=0.0)
        text = f"{self.compared:7d} {numbers} away {small:.0e}, {slopes:.0e}"
        text += f"  UNEXPLAINED {self.unexplained}" if self.unexplained else ""
        text += f"  WRONG PHASE {self.wrong_phase}" if self.wrong_phase else ""
        for title, count in (
            ("FAILED", self.failures),
            ("LOST", self.lost),
            ("refused", self.refused),
            ("larger ones", self.reasons),
        ):
            text += f"  {title}: {dict(count)}" if count else ""
        return text + (f"  (failures of the library: {self.library_failures})" if self.library_failures else "")
