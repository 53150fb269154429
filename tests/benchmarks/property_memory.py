"""Peak memory of a process that computes a million states: ``python -m tests.benchmarks.property_memory``.

Every line is a process of its own: it imports the package, computes all seven properties of its states in one call, and
tells the largest size that its memory had (resident set), interpreter and arrays given and returned included.
"""

from __future__ import annotations

import resource
import subprocess
import sys
from pathlib import Path

import numpy as np

from reportgen.fluids import real_fluid

STATES = 1_000_000
#: Largest size allowed [MB].
BAR = 1000.0
FLUIDS = ("water", "carbon dioxide", "nitrogen", "R134a")
PAIRS = ("temperature", "specific_enthalpy", "specific_entropy", "saturation")
FIELDS = (
    "density",
    "specific_enthalpy",
    "specific_entropy",
    "specific_internal_energy",
    "isochoric_heat_capacity",
    "isobaric_heat_capacity",
    "speed_of_sound",
    "phase",
)


def peak() -> float:
    """Largest size of this process so far [MB].

    ``ru_maxrss`` of a process started by a larger one can be the size of that one, so Linux is asked directly.
    """
    status = Path("/proc/self/status")
    if status.exists():
        fields = dict(line.split(":", 1) for line in status.read_text(encoding="utf-8").splitlines())
        return float(fields["VmHWM"].split()[0]) / 1e3
    size = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss
    return size / 1e6 if sys.platform == "darwin" else size / 1e3


def compute(name: str, second: str, count: int) -> None:
    """Compute ``count`` states from pressure and another property and keep all fields; or saturated states."""
    fluid = real_fluid(name)
    limits, critical = fluid.limits, fluid.limits.critical_point
    assert critical is not None
    random = np.random.default_rng(1)
    low = limits.minimum_temperature
    if second == "saturation":
        both = fluid.saturation(temperature=random.uniform(low, critical.temperature, count))
        kept = [getattr(state, field) for state in both for field in FIELDS]
    else:
        pressure = np.exp(random.uniform(np.log(1e3), np.log(critical.pressure * 3), count))
        if second == "temperature":
            values = random.uniform(low + 1, min(3 * critical.temperature, limits.maximum_temperature), count)
        else:
            # across the dome: a third to a half of the states has two phases
            high = min(1.5 * critical.temperature, limits.maximum_temperature)
            temperatures = [max(0.6 * critical.temperature, 1.01 * low), high]
            ends = fluid.at(temperature=temperatures, pressure=0.5 * critical.pressure)
            values = random.uniform(*getattr(ends, second), count)
        state = fluid.at(errors="mask", pressure=pressure, **{second: values})
        kept = [getattr(state, field) for field in FIELDS]
    assert sum(array.size for array in kept) >= count * len(FIELDS)


def measure(name: str, second: str, count: int = STATES) -> float:
    """Peak memory [MB] of a fresh process that computes ``count`` states."""
    command = [sys.executable, "-m", "tests.benchmarks.property_memory", name, second, str(count)]
    return float(subprocess.run(command, capture_output=True, text=True, check=True).stdout)


def main() -> None:
    """Print the table, or compute what the arguments ask for and print the peak."""
    if len(sys.argv) > 1:
        name, second, count = sys.argv[1:]
        compute(name, second, int(count))
        print(peak())
        return
    print(f"peak memory, {STATES} states with {len(FIELDS)} fields kept; bar {BAR:.0f} MB")
    for name in FLUIDS:
        line = ", ".join(f"{second} {measure(name, second):.0f} MB" for second in PAIRS)
        print(f"{name:15s} {line}", flush=True)


if __name__ == "__main__":
    main()
