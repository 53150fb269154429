"""Random well-posed networks of up to 30 pieces: how many give back the states they were built from.

    python -m tests.benchmarks.random_networks [COUNT] [FIRST]

prints every network that does not, with what became of it, and the tally. Sets for which the program shows a second
solution beside the known one are not well posed and are counted apart. How the networks and their givens are drawn
is in ``tests/balances/random_plants.py`` and ``random_givens.py``; a small sample is part of the suite.
"""

from __future__ import annotations

import sys
import time
from collections import Counter

import numpy as np

from tests.balances.random_givens import draw, judge


def main(count: int = 2000, first: int = 0) -> None:
    tally: Counter[str] = Counter()
    sizes: list[int] = []
    spent, began = 0.0, time.perf_counter()
    for seed in range(first, first + count):
        network, givens = draw(seed)
        sizes.append(len(network.plant.equipment))
        start = time.perf_counter()
        verdict, text = judge(network, givens)
        used = time.perf_counter() - start
        spent += used
        tally[verdict] += 1
        if verdict != "recovered" or used > 5.0:
            print(f"{seed}: {sizes[-1]} pieces, {verdict} after {used:.1f} s. {text}", flush=True)
        if (seed + 1 - first) % 100 == 0:
            print(f"after {seed + 1 - first}: {dict(tally)}", flush=True)
    print(f"{count} networks of {min(sizes)} to {max(sizes)} pieces, {np.mean(sizes):.1f} on average")
    print(", ".join(f"{verdict} {number}" for verdict, number in sorted(tally.items())))
    share = 100 * tally["recovered"] / (count - tally["not unique"])
    print(f"recovered {share:.2f} % of those with one solution")
    print(f"{spent:.0f} s solving, {time.perf_counter() - began:.0f} s in all")


if __name__ == "__main__":
    main(*(int(argument) for argument in sys.argv[1:]))
