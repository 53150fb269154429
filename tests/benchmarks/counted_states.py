"""Entropies, heat capacities and enthalpies of counted states against the polynomials of the ideal gases, as a table.

Run by hand: ``python -m tests.benchmarks.counted_states``. Largest relative differences between 298.15 K and 1500 K,
and at the highest temperature of each gas, which no test bounds.
"""

from __future__ import annotations

import numpy as np

from reportgen.fluids import statistical
from reportgen.fluids.gases.species import library
from reportgen.fluids.statistical.molecules import Polyatomic, find

COMPARED = np.array([298.15, *np.arange(300.0, 1501.0, 50.0)])
BAR = 1e-3


def largest(differences, temperatures):
    """The difference of the largest size with its temperature [K]."""
    index = int(np.nanargmax(np.abs(differences)))
    return float(differences[index]), float(temperatures[index])


def main() -> None:
    print(
        f"{'gas':6}{'S°(298.15 K)':>14}"
        + "".join(f"{title:>22}" for title in ("S", "c_p", "H − H(298)"))
        + "   at the highest temperature: S, c_p"
    )
    beyond = []
    for name in statistical.names():
        found = statistical.differences(name, COMPARED)
        cells = []
        for quantity, values in found.items():
            size, where = largest(values, COMPARED)
            cells.append(f"{100 * size:+10.4f} % {where:6.0f} K")
            if abs(size) > BAR:
                beyond.append((name, quantity, size, where))
        gas = statistical.gas(name)
        top = gas.maximum_temperature
        hot = statistical.differences(name, top)
        high = f"   {top:.0f} K: {100 * hot['entropy']:+.3f} %, {100 * hot['heat_capacity']:+.3f} %"
        print(f"{name:6}{gas.entropy(298.15, 1e5):14.3f}" + "".join(f"{cell:>22}" for cell in cells) + high)
    print(f"\nMore than {100 * BAR:g} %:")
    for name, quantity, size, where in beyond:
        kind = "polyatomic" if isinstance(find(name).structure, Polyatomic) else "diatomic"
        source = library().species[name].source
        print(f"  {name:5} {kind:10} {quantity:13} {100 * size:+8.3f} % at {where:.0f} K   (polynomials: {source})")


if __name__ == "__main__":
    main()
