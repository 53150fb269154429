"""Gases from their molecules: entropy, enthalpy and heat capacity by counting states, S = k ln Ω.

    gas = statistical.gas("nitrogen")
    gas.entropy(298.15, 1e5)              # 191.61 J/(mol*K), from molecular constants alone
    statistical.differences("nitrogen", [298.15, 1000.0])   # against the polynomials of the ideal gas

Nothing here shares data with the ideal gases of ``reportgen.fluids.ideal_gas`` but the molar mass, so the two check
each other. Conventions are those of the tables: nuclear spin and the mixing of isotopes do not count, enthalpy starts
from the lowest level, H(T) − H(0).
"""

from __future__ import annotations

from reportgen.fluids.statistical.comparison import differences
from reportgen.fluids.statistical.gas import StatisticalGas, gas
from reportgen.fluids.statistical.molecules import names
from reportgen.fluids.statistical.multiplicity import (
    entropy_of_arrangements,
    log_arrangements,
    mixing_entropy,
    residual_entropy,
)

__all__ = [
    "StatisticalGas",
    "differences",
    "entropy_of_arrangements",
    "gas",
    "log_arrangements",
    "mixing_entropy",
    "names",
    "residual_entropy",
]
