"""Random calls of every property model with sound, extreme and absurd input: ``python -m tests.benchmarks.fuzz``.

Each call either returns a State or raises an InputError or RangeError in time. What is returned is checked: one shape,
NaN where NaN was given or a fault is noted, every finite state inside the limits of its model, the properties given
still there. Refusals are counted by their reason.
"""

from __future__ import annotations

import argparse
import time
import traceback
import warnings
from collections import Counter
from collections.abc import Callable, Iterator
from dataclasses import dataclass, field
from decimal import Decimal
from fractions import Fraction
from typing import Any

import numpy as np

from reportgen import fluids
from reportgen.errors import Fault, InputError, RangeError
from reportgen.fluids.pairs import PROPERTIES
from reportgen.fluids.state import FIELDS, State

__all__ = ["Counts", "fuzz", "models"]

#: Seconds allowed for a call on a busy machine: at all, and for each state of a long batch.
SECONDS, SECONDS_A_STATE = 5.0, 3e-3
#: Relative overstepping of a limit that is put down to rounding.
EDGE = 1e-8

#: Reasons of refusals by what their text says; the first that fits counts.
REASONS = (
    ("is not a finite number", "infinite"),
    ("outside the range", "outside the range"),
    ("is not a number or an array", "not numbers"),
    ("shapes", "shapes that do not fit"),
    ("exactly two", "not two properties"),
    ("not a property that fixes", "unknown property"),
    ("cannot be evaluated from this pair", "pair not carried"),
    ("raised or masked", "unknown errors mode"),
    ("fixed by a temperature or a pressure", "saturation of nothing"),
    ("states at", "several states"),
    ("do not tell liquid from vapour", "on the saturation line"),
    ("lie on one of the lines", "on a line of a pseudo-pure fluid"),
    ("between the bubble and the dew line", "between bubble and dew line"),
    ("do not tell the pressure", "thin gas"),
    ("is solid at", "solid"),
    ("or solid", "too cold, or solid"),
    ("below the minimum", "below the lowest temperature"),
    ("above the maximum", "above the highest temperature or pressure"),
    ("would be above", "above the highest temperature"),
    ("the lowest computed", "too thin"),
    ("no saturation", "no saturation there"),
    ("not above zero", "not above zero"),
    ("absolute pressure", "not above zero"),
    ("not between 0 and 1", "no quality"),
    ("other side of saturation", "negative distance from saturation"),
    ("highest within the limits", "too dense"),
    ("there it lies between", "outside what the line has"),
    ("within its limits was found", "no state within the limits"),
    ("depends on temperature alone", "dependent properties"),
    ("not independent", "dependent properties"),
    ("does not depend on pressure or temperature", "dependent properties"),
    ("has no bubble point", "no saturation of a mixture"),
    ("has no dew point", "no saturation of a mixture"),
    ("splits into two liquids", "three phases, or two liquids"),
    ("the covolume", "too dense"),
)
#: Fields that are above zero wherever they have a value.
_POSITIVE = ("temperature", "pressure", "density", "isobaric_heat_capacity", "isochoric_heat_capacity")
#: What no user may ever be told.
FORBIDDEN = ("fault of the program", "Traceback")


@dataclass
class Counts:
    """What became of the calls."""

    calls: int = 0
    returned: int = 0
    raised: int = 0
    states: int = 0
    finite: int = 0
    masked: int = 0
    reasons: Counter[str] = field(default_factory=Counter)
    other: Counter[str] = field(default_factory=Counter)
    unhandled: list[str] = field(default_factory=list)
    unflagged: list[str] = field(default_factory=list)
    slow: list[str] = field(default_factory=list)
    worst_seconds: float = 0.0

    def reason(self, fault: Fault, call: str) -> None:
        """Count a refusal."""
        text = str(fault)
        if any(part in text for part in FORBIDDEN):
            self.unhandled.append(f"{call}: {text}")
        for part, name in REASONS:
            if part in text:
                self.reasons[name] += 1
                return
        self.other[fault.message[:90]] += 1

    def __str__(self) -> str:
        lines = [
            f"{self.calls} calls: {self.returned} returned, {self.raised} refused; {self.states} states: "
            f"{self.finite} evaluated, {self.masked} masked with a reason",
            f"unhandled {len(self.unhandled)}, finite outside the limits or unflagged {len(self.unflagged)}, "
            f"over time {len(self.slow)} (longest call {self.worst_seconds:.2f} s)",
            *(f"  {count:8d}  {name}" for name, count in self.reasons.most_common()),
            *(f"  {count:8d}  (other) {name}" for name, count in self.other.most_common(20)),
        ]
        for title, texts in (("UNHANDLED", self.unhandled), ("UNFLAGGED", self.unflagged), ("SLOW", self.slow)):
            lines += [f"{title} {text[:1200]}" for text in texts[:15]]
        return "\n".join(lines)


def models(names: tuple[str, ...] | None = None) -> list[Any]:
    """All real fluids (or those named), and models of every other kind."""
    real = [fluids.real_fluid(name) for name in (names or fluids.names())]
    gases = [fluids.ideal_gas(key) for key in ("air", "N2", {"CO2": 0.1, "N2": 0.7, "H2O": 0.2})]
    gases.append(fluids.ideal_gas("air", heat_capacity=1005.0))
    liquids = [
        fluids.incompressible("oil", density=880.0, specific_heat=1900.0, limits=(260.0, 570.0)),
        fluids.incompressible("brick", density=1800.0, specific_heat=840.0, phase="solid", limits=(200.0, 1300.0)),
    ]
    cubic = [fluids.cubic("propane"), fluids.cubic({"CO2": 0.3, "N2": 0.7})]
    return [*real, *gases * 3, *liquids * 3, *cubic]


def _sound(random: np.random.Generator, model: Any, name: str) -> float:
    """A value that can occur, or that lies at an edge of what can."""
    limits = model.limits
    critical, triple = limits.critical_point, limits.triple_point
    low, high = limits.minimum_temperature, limits.maximum_temperature
    top = limits.maximum_pressure if np.isfinite(limits.maximum_pressure) else 1e9
    edge = float(random.choice([1.0, 1 - 1e-12, 1 + 1e-12, 1 - 1e-9, 1 + 1e-9, 1 - 1e-4, 1 + 1e-4]))
    beside = random.random() < 0.25
    if name == "temperature":
        points = [low, high] + ([critical.temperature] * 3 if critical else [])
        return float(random.choice(points)) * edge if beside else float(random.uniform(low, high))
    if name == "pressure":
        points = [top] + ([critical.pressure] * 3 if critical else []) + ([triple.pressure] if triple else [])
        return (
            float(random.choice(points)) * edge if beside else float(np.exp(random.uniform(np.log(1e-3), np.log(top))))
        )
    if name in ("density", "specific_volume"):
        middle = critical.density if critical and critical.density else 100.0
        rho = middle * edge if beside else middle * float(10 ** random.uniform(-6, 0.6))
        return rho if name == "density" else 1 / rho
    if name == "quality":
        return float(random.choice([0.0, 1.0, 0.5, 1e-12, 1 - 1e-12])) if beside else float(random.uniform(0, 1))
    if name in ("superheat", "subcooling"):
        return 0.0 if beside else float(10 ** random.uniform(-9, 3))
    state = model.at(temperature=random.uniform(low, high), pressure=1e5, errors="mask")
    value = float(getattr(state, name))
    scale = model.gas_constant if name == "specific_entropy" else model.gas_constant * high
    return (value if np.isfinite(value) else 0.0) + float(random.normal()) * scale * float(random.choice([0, 1, 5, 50]))


#: Pairs that most models carry, so that not most calls end at the door.
_CARRIED = (
    *(("pressure", name) for name in PROPERTIES if name != "pressure"),
    *(("temperature", name) for name in ("quality", "density", "specific_enthalpy", "specific_entropy")),
    *(("density", name) for name in ("specific_internal_energy", "specific_enthalpy", "specific_entropy")),
    ("specific_volume", "specific_internal_energy"),
    ("temperature", "specific_internal_energy"),
    ("specific_enthalpy", "specific_entropy"),
    ("specific_entropy", "specific_enthalpy"),
)
_ABSURD = (0.0, -0.0, -1.0, 1e-300, 5e-324, 1e300, -1e300, 1.8e308, np.inf, -np.inf, np.nan, 1e-30, 1e15, -273.15)


def _value(random: np.random.Generator, model: Any, name: str) -> float:
    return float(random.choice(_ABSURD)) if random.random() < 0.2 else _sound(random, model, name)


def _dressed(random: np.random.Generator, values: np.ndarray) -> Any:
    """The same numbers as another type or layout, or something that is no number."""
    kind = int(random.integers(0, 120))
    with np.errstate(all="ignore"):
        return {
            0: lambda: values.tolist(),
            1: lambda: tuple(values.reshape(-1).tolist()),
            2: lambda: values.astype(np.float32),
            3: lambda: np.nan_to_num(values, posinf=2**40, neginf=-(2**40)).clip(-(2.0**60), 2.0**60).astype(np.int64),
            4: lambda: np.asfortranarray(values),
            5: lambda: np.repeat(values[..., None], 2, axis=-1)[..., 0],
            6: lambda: values.astype(object),
            7: lambda: values.astype(complex),
            8: lambda: values.astype(str),
            9: lambda: values > 0,
            10: lambda: random.choice(np.array(["12 bar", "", "nan"])),
            11: lambda: None,
            12: lambda: 10**400,
            13: lambda: Decimal("1.5"),
            14: lambda: Fraction(3, 2),
            15: lambda: {"a": 1},
            16: lambda: [[1.0], [1.0, 2.0]],
            17: lambda: np.datetime64("2026-01-01"),
            18: lambda: np.ma.masked_invalid(values),
            19: lambda: np.longdouble(1.0) * values,
            20: lambda: memoryview(np.ascontiguousarray(values)),
        }.get(kind, lambda: values)()


def _shape(random: np.random.Generator) -> tuple[int, ...]:
    shapes = ((), (), (1,), (3,), (7,), (20,), (0,), (2, 3), (2, 1), (1, 3), (0, 4), (2, 0, 3), (1, 1, 1), (5, 1, 2))
    return shapes[int(random.integers(0, len(shapes)))]


def calls(
    random: np.random.Generator, model: Any, long_batches: bool
) -> Iterator[tuple[str, Callable[[], Any], dict[str, Any]]]:
    """Endless random calls of one model: in words, the call itself, and what is given."""
    names = list(PROPERTIES)
    while True:
        chosen = [str(name) for name in random.choice(names, size=2, replace=False)]
        if random.random() < 0.75:
            chosen = list(_CARRIED[int(random.integers(0, len(_CARRIED)))])
        if random.random() < 0.03:
            chosen = [
                str(name) for name in random.choice([*names, "presure", "entropy", ""], size=int(random.integers(0, 4)))
            ]
        shape = (int(10 ** random.uniform(3, 5)),) if long_batches and random.random() < 2e-3 else _shape(random)
        given: dict[str, Any] = {}
        for name in chosen:
            own = shape if random.random() < 0.7 else _shape(random)
            if np.prod(own) > 1000:
                few = np.array([_value(random, model, name) if name in PROPERTIES else 1.0 for _ in range(50)])
                values = random.choice(few, size=own)
            else:
                count = int(np.prod(own))
                values = np.array([_value(random, model, name) if name in PROPERTIES else 1.0 for _ in range(count)])
                values = values.reshape(own)
            given[name] = _dressed(random, values)
        errors = "mask" if random.random() < 0.6 else "raise"
        if random.random() < 0.01:
            errors = str(random.choice(["ignore", "", "Mask"]))
        method = "at"
        if random.random() < 0.05 and hasattr(model, "roots"):
            method = "roots"
        if random.random() < 0.03 and hasattr(model, "saturation"):
            method, given = "saturation", {key: given[key] for key in given if key in ("temperature", "pressure")}
        words = (
            f"{model!r}.{method}(errors={errors!r}, " + ", ".join(f"{k}={_short(v)}" for k, v in given.items()) + ")"
        )

        def call(method: str = method, errors: str = errors, given: dict[str, Any] = given) -> Any:
            return getattr(model, method)(errors=errors, **given)

        yield words, call, given


def _short(value: Any) -> str:
    if isinstance(value, np.ndarray):
        return f"np.array({value.tolist()!r}, {value.dtype})"[:300]
    return repr(value)[:300]


def _critical(model: Any, temperature: np.ndarray) -> np.ndarray:
    """Where c_p is infinite in truth."""
    critical = model.limits.critical_point
    near = np.zeros(temperature.shape, dtype=bool)
    return near if critical is None else np.abs(temperature / critical.temperature - 1) < 1e-6


def _check(model: Any, state: State, given: dict[str, Any] | None) -> str:
    """What is wrong with a state; empty if nothing. ``given`` is None where shapes and faults are of another call."""
    limits = model.limits
    t, p, rho = state.flat("temperature"), state.flat("pressure"), state.flat("density")
    size = int(np.prod(state.shape))
    for name in FIELDS:
        array = getattr(state, name)
        if np.shape(array) != state.shape or state.flat(name).size != size:
            return f"{name} has another shape"
    flagged = np.zeros(size, dtype=bool)
    if given is not None:
        flagged[list(state.faults)] = True
    for name in FIELDS:
        values = state.flat(name)
        if name == "phase":
            if (values[flagged] != "").any():
                return "a phase beside a fault"
            if (values == "")[np.isfinite(t) & np.isfinite(p)].any():
                return "a state without a phase"
        elif np.isfinite(values[flagged]).any():
            return f"finite {name} beside a fault"
        elif (np.isinf(values) & ~(_critical(model, t) if name == "isobaric_heat_capacity" else False)).any():
            return f"infinite {name}"
        elif name in _POSITIVE and (values <= 0).any():
            return f"{name} not above zero"
    answered = np.isfinite(t) & np.isfinite(p) & np.isfinite(rho)
    with np.errstate(invalid="ignore"):
        outside = (t < limits.minimum_temperature * (1 - EDGE)) | (t > limits.maximum_temperature * (1 + EDGE))
        outside |= (p <= 0) | (p > limits.maximum_pressure * (1 + EDGE)) | ~(rho > 0)
    if (outside & answered).any():
        i = int(np.flatnonzero(outside & answered)[0])
        return f"T = {t[i]!r}, p = {p[i]!r}, rho = {rho[i]!r} outside the limits without a flag"
    if (np.isnan(state.flat("specific_enthalpy")) | np.isnan(state.flat("specific_entropy")))[answered].any():
        return "a state without enthalpy or entropy"
    x = state.flat("quality")
    if ((x < 0) | (x > 1)).any():
        return "a quality outside 0 to 1"
    if given is None:
        return ""
    arrays = {name: np.asarray(value, dtype=np.float64) for name, value in given.items()}
    if np.broadcast_shapes(*(array.shape for array in arrays.values())) != state.shape:
        return "not the common shape of what was given"
    unknown = np.zeros(state.shape, dtype=bool)
    for name, array in arrays.items():
        wide = np.broadcast_to(array, state.shape)
        unknown |= np.isnan(wide)
        back = getattr(state, name)
        with np.errstate(invalid="ignore", over="ignore"):
            near = 1e-9 * (np.abs(wide) + (name == "quality"))
            good = ~(np.abs(back - wide) > near) | ~np.isfinite(back)
        if not good.all():
            return f"{name} is not what was given"
    if (unknown.reshape(-1) & (answered | flagged)).any():
        return "a state or a reason where NaN was given"
    if (~answered & ~flagged & ~unknown.reshape(-1)).any():
        return "an element without a state, without a reason"
    return ""


def fuzz(count: int, seed: int, chosen: list[Any], long_batches: bool = False) -> Counts:
    """Make ``count`` random calls."""
    random = np.random.default_rng(seed)
    counts = Counts()
    streams = [calls(random, model, long_batches) for model in chosen]
    for _ in range(count):
        number = int(random.integers(0, len(chosen)))
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")
            words, call, given = next(streams[number])
        counts.calls += 1
        start = time.perf_counter()
        result: Any = None
        with warnings.catch_warnings():
            warnings.simplefilter("error")
            try:
                result = call()
            except (InputError, RangeError) as error:
                counts.raised += 1
                for fault in error.faults[:1]:
                    counts.reason(fault, words)
            except Exception:  # noqa: BLE001 - whatever else comes is what is looked for
                counts.unhandled.append(f"{words}: {traceback.format_exc(limit=-4)}")
            seconds = time.perf_counter() - start
            found = [] if result is None else [result] if isinstance(result, State) else list(result)
            size = sum(int(np.prod(state.shape)) for state in found)
            counts.worst_seconds = max(counts.worst_seconds, seconds)
            if seconds > SECONDS + SECONDS_A_STATE * max(size, _size(given)):
                counts.slow.append(f"{seconds:.2f} s {words}")
            if not found:
                continue
            counts.returned += 1
            try:
                for state in found:
                    # saturation gives the quality besides; roots have an axis more
                    same = isinstance(result, State) and ".roots(" not in words
                    wrong = _check(chosen[number], state, given if same else None)
                    if wrong:
                        counts.unflagged.append(f"{wrong}: {words}")
                    counts.states += int(np.prod(state.shape))
                    counts.finite += int(np.count_nonzero(np.isfinite(state.flat("density"))))
                    counts.masked += len(state.faults)
                    for index in list(state.faults)[:20]:
                        counts.reason(state.faults[index], words)
            except Exception:  # noqa: BLE001 - a state that cannot be read is unhandled too
                counts.unhandled.append(f"reading {words}: {traceback.format_exc(limit=-4)}")
    return counts


def _size(given: dict[str, Any]) -> int:
    """Number of elements that a call asks for, about."""
    return int(max((np.size(value) for value in given.values() if isinstance(value, np.ndarray)), default=1))


def main() -> int:
    """Print the counts; 1 if a call was unhandled, unflagged or over time."""
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--calls", type=int, default=100_000)
    parser.add_argument("--seed", type=int, default=1)
    parser.add_argument("--fluids", default="", help="real fluids, separated by commas (all)")
    asked = parser.parse_args()
    start = time.perf_counter()
    counts = fuzz(asked.calls, asked.seed, models(tuple(asked.fluids.split(",")) if asked.fluids else None), True)
    print(counts)
    print(f"{time.perf_counter() - start:.0f} s")
    return 1 if counts.unhandled or counts.unflagged or counts.slow else 0


if __name__ == "__main__":
    raise SystemExit(main())
