"""Time to solve against the number of pieces: 10, 100, 1 000, one case each.

    python -m tests.benchmarks.network_growth

Two plants of real steam and water are grown. ``modules``: trains of ten pieces (compression with an intercooler, split,
recycle, mixing, expansion, a throttle and a pipe) one after the other, each with a recycle that is solved as one block.
``one recycle``: the same pieces inside a single recycle of given duties, so that nearly all relations are one block.
The exponent is the slope of log time against log pieces; times are of the processor, the best of a few runs, with one
thread: others that wait for work would be counted as working.
"""

from __future__ import annotations

import math
import os
import time

os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")  # before numpy is loaded

from reportgen.balances import EquipmentDefinition, Plant, solve
from reportgen.fluids import real_fluid

SURROUNDINGS = {"surroundings.temperature": 288.15, "surroundings.pressure": 1.013e5}
SIZES = (10, 100, 1000)
REPEATS = {10: 5, 100: 3, 1000: 1}


class Growing:
    """A plant that grows along one stream of steam."""

    def __init__(self) -> None:
        self.equipment: dict[str, EquipmentDefinition] = {}
        self.givens: dict[str, float] = dict(SURROUNDINGS)
        self.count = 0

    def state(self) -> str:
        self.count += 1
        return str(self.count)

    def add(self, kind: str, inlet: str, **given: float) -> str:
        outlet, tag = self.state(), f"E{len(self.equipment) + 1}"
        self.equipment[tag] = EquipmentDefinition(kind, {"inlet": (inlet,), "outlet": (outlet,)})
        self.givens |= {f"equipment.{tag}.{name}": value for name, value in given.items()}
        return outlet

    def split(self, inlet: str, share: float) -> tuple[str, str]:
        first, second, tag = self.state(), self.state(), f"E{len(self.equipment) + 1}"
        self.equipment[tag] = EquipmentDefinition("splitter", {"inlet": (inlet,), "outlets": (first, second)})
        self.givens[f"equipment.{tag}.split_fraction"] = share
        return first, second

    def mix(self, *inlets: str) -> str:
        outlet, tag = self.state(), f"E{len(self.equipment) + 1}"
        self.equipment[tag] = EquipmentDefinition("mixer", {"inlets": inlets, "outlet": (outlet,)})
        return outlet

    def plant(self) -> Plant:
        states = {str(number): "steam" for number in range(1, self.count + 1)}
        return Plant({"steam": real_fluid("water")}, states, self.equipment)


def feed(grown: Growing) -> str:
    state = grown.state()
    grown.givens |= {
        f"states.{state}.pressure": 2e5,
        f"states.{state}.temperature": 500.0,
        f"states.{state}.mass_flow": 10.0,
    }
    return state


def modules(pieces: int) -> tuple[Plant, dict[str, float]]:
    """Modules of ten pieces in series, each with a recycle of its own."""
    grown = Growing()
    stream = feed(grown)
    while len(grown.equipment) < pieces:
        back = grown.state()
        mixed = grown.mix(stream, back)
        hot = grown.add("compressor", mixed, pressure_ratio=2.0, isentropic_efficiency=0.8)
        cooled = grown.add("cooler", hot, heat=-2.4e6, pressure_drop=1e3)
        forward, returned = grown.split(cooled, 0.8)
        tag = f"E{len(grown.equipment) + 1}"
        grown.equipment[tag] = EquipmentDefinition("throttling-valve", {"inlet": (returned,), "outlet": (back,)})
        warm = grown.add("pipe", forward, pressure_drop=2e3, heat=-1e4)
        wide = grown.add("turbine", warm, pressure_ratio=1.5, isentropic_efficiency=0.85)
        again = grown.add("heater", wide, heat=5e5)
        low = grown.add("throttling-valve", again, pressure_drop=1e4)
        stream = grown.add("cooler", low)
        grown.givens |= {f"states.{stream}.temperature": 500.0, f"states.{stream}.pressure": 2e5}
    return grown.plant(), grown.givens


def one_recycle(pieces: int) -> tuple[Plant, dict[str, float]]:
    """All pieces inside one recycle; duties bring the stream back to 500 K after each machine."""
    steam = real_fluid("water")
    low, high = (steam.at(pressure=pressure, temperature=500.0) for pressure in (2e5, 3e5))
    ends = [
        float(steam.at(pressure=pressure, specific_entropy=state.specific_entropy).specific_enthalpy)
        for state, pressure in ((low, 3e5), (high, 2e5))
    ]
    flow = 10.0 / 0.6
    raised = low.specific_enthalpy + (ends[0] - low.specific_enthalpy) / 0.8
    lowered = high.specific_enthalpy + (ends[1] - high.specific_enthalpy) * 0.85
    grown = Growing()
    back = grown.state()
    stream = grown.mix(feed(grown), back)
    while len(grown.equipment) < pieces - 2:
        hot = grown.add("compressor", stream, pressure_ratio=1.5, isentropic_efficiency=0.8)
        cooled = grown.add("cooler", hot, heat=flow * float(high.specific_enthalpy - raised))
        wide = grown.add("turbine", cooled, pressure_ratio=1.5, isentropic_efficiency=0.85)
        stream = grown.add("heater", wide, heat=flow * float(low.specific_enthalpy - lowered))
    _, returned = grown.split(stream, 0.6)
    tag = f"E{len(grown.equipment) + 1}"
    grown.equipment[tag] = EquipmentDefinition("throttling-valve", {"inlet": (returned,), "outlet": (back,)})
    return grown.plant(), grown.givens


def main() -> None:
    print(f"{'plant':14} {'pieces':>6} {'states':>6} {'seconds':>8} {'exponent':>9} {'left of energy [W]':>19}")
    for name, build in (("modules", modules), ("one recycle", one_recycle)):
        before = None
        for size in SIZES:
            plant, givens = build(size)
            best = math.inf
            for _ in range(REPEATS[size]):
                start = time.process_time()
                solution = solve(plant, givens)
                best = min(best, time.process_time() - start)
            pieces = len(plant.equipment)
            exponent = "" if before is None else f"{math.log(best / before[1]) / math.log(pieces / before[0]):.2f}"
            left = abs(float(solution.values["total.energy_imbalance"][0]))
            print(f"{name:14} {pieces:6} {len(plant.states):6} {best:8.2f} {exponent:>9} {left:19.1e}", flush=True)
            before = pieces, best


if __name__ == "__main__":
    main()
