"""Whatever a file says, reading it gives a Calculation or an InputError, soon."""

from __future__ import annotations

import time
from pathlib import Path

import pytest
from hypothesis import HealthCheck, example, given, settings
from hypothesis import strategies as st

from reportgen import spec
from reportgen.errors import InputError
from reportgen.spec import json_schema
from reportgen.spec.schema import document
from tests.spec.writing import HEAD, write

ROOT = Path(__file__).parents[2]
TEXTS = [
    (ROOT / "reportgen" / "spec" / "starter" / "calculation.toml").read_text("utf-8"),
    *(path.read_text("utf-8") for path in sorted((ROOT / "projects").glob("*/calculation.toml"))),
    *(path.read_text("utf-8") for path in sorted((Path(__file__).parent / "malformed").glob("*.toml"))[::4]),
]

#: What a slip of the hand, another program or ill will may put into a file.
PIECES = [
    *"[]{}\"'=,.#\\\n\t \0±%\r",
    '"""',
    "'''",
    "[[",
    "]]",
    "[states.1]\n",
    "[equipment.PRV-3]\n",
    "[[revisions]]\n",
    'kind = "turbine"\n',
    'like = "1"\n',
    "heat_ports = [{}]\n",
    "1e9999",
    "-nan",
    "9" * 400,
    "2026-03-12",
    "99:99:99",
    "true",
    '""',
    "{}",
    "[[[[[[[[[[[[[[[[",
    '"9 bar(g)"',
    '"-1e308 K ± 1e308 %"',
    '"٣ bar"',
    "\N{RIGHT-TO-LEFT OVERRIDE}",
    "\N{ZERO WIDTH NO-BREAK SPACE}",
    "\ud800",
    "\U0001f525",
]


@st.composite
def mutated(draw: st.DrawFn) -> str:
    """A calculation file with a few things inserted, taken out, exchanged or repeated."""
    text = draw(st.sampled_from(TEXTS))
    for _ in range(draw(st.integers(1, 6))):
        begin = draw(st.integers(0, len(text)))
        end = min(len(text), begin + draw(st.sampled_from([0, 0, 1, 2, 5, 40, 400])))
        put = draw(st.one_of(st.sampled_from(PIECES), st.just(text[end : end + 60]), st.text(max_size=4)))
        text = text[:begin] + put + text[end:]
    return text


def read_or_refuse(folder: Path, content: bytes) -> None:
    (folder / "calculation.toml").write_bytes(content)
    refused = None
    try:
        spec.read(folder)
    except InputError as error:
        refused = error
    if refused is not None:
        assert refused.faults
        for fault in refused.faults[:200]:
            assert fault.file
            assert fault.line is not None
            assert fault.column is not None
            assert 1 <= fault.line <= content.count(b"\n") + 1
            assert fault.column >= 1
            assert len(str(fault)) < 2000


@settings(
    max_examples=1000,
    deadline=None,
    derandomize=True,
    suppress_health_check=[HealthCheck.function_scoped_fixture, HealthCheck.too_slow],
)
@given(mutated())
@example("[a]\n" * 3)
@example("\r")
@example("[states.'[key]']\nfluid = 1\n['[key]']\n")
def test_a_mutated_file_is_read_or_refused(tmp_path: Path, text: str) -> None:
    read_or_refuse(tmp_path, text.encode("utf-8", "surrogatepass"))


@settings(
    max_examples=100, deadline=None, derandomize=True, suppress_health_check=[HealthCheck.function_scoped_fixture]
)
@given(st.binary(max_size=300))
def test_any_bytes_are_read_or_refused(tmp_path: Path, content: bytes) -> None:
    read_or_refuse(tmp_path, content)


VALUES = st.recursive(
    st.one_of(
        st.sampled_from(
            ["1", "-0.5", "1e9999", "nan", "true", "2026-03-12", "12:00:00", '"1"', '"steam"', '"9 bar"', '""', "'x'"]
        ),
    ),
    lambda inner: st.one_of(
        st.lists(inner, max_size=3).map(lambda items: "[" + ", ".join(items) + "]"),
        st.lists(inner, max_size=3).map(
            lambda items: (
                "{"
                + ", ".join(f"{key} = {item}" for key, item in zip(("value", "heat", "x"), items, strict=False))
                + "}"
            )
        ),
    ),
    max_leaves=6,
)
SECTIONS = sorted(document().model_fields)
KEYS = sorted({key for entry in json_schema()["$defs"].values() for key in entry["properties"]})


@settings(
    max_examples=300, deadline=None, derandomize=True, suppress_health_check=[HealthCheck.function_scoped_fixture]
)
@given(
    st.lists(
        st.tuples(st.sampled_from(SECTIONS), st.sampled_from(["", ".1", ".x.limits"]), st.sampled_from(KEYS), VALUES),
        max_size=8,
    )
)
def test_values_of_the_wrong_form_in_any_place_are_refused(
    tmp_path: Path, entries: list[tuple[str, str, str, str]]
) -> None:
    text = "\n".join(f"{section}{inner}.{key} = {value}" for section, inner, key, value in entries)
    read_or_refuse(tmp_path, text.encode("utf-8"))


LARGE = {
    "a key of very many words": "a " * 200_000 + "= 1\n",
    "states that are like one another in a long chain": "".join(
        f'[states.s{number}]\nlike = "s{number + 1}"\n' for number in range(3000)
    ),
    "states that all miss the name of a fluid": "".join(
        f'[states.s{number}]\nfluid = "f{number}"\n' for number in range(6000)
    ),
    "criteria of unknown paths": "".join(
        f'[criteria.c{number}]\nvalue = "states.s{number}.pressure"\nat_most = "1 bar"\n' for number in range(4000)
    ),
    "misspelt keys": "[states.1]\n" + "".join(f'pressure{number} = "1 bar"\n' for number in range(15_000)),
    "one long list of ports": '[equipment.M]\nkind = "mixer"\ninlets = [' + '"1", ' * 15_000 + "]\n",
    "states that enter many pieces": "".join(
        f'[equipment.M{number}]\nkind = "mixer"\ninlets = ["1"]\noutlet = "1"\n' for number in range(3000)
    )
    + "[states.1]\n",
    "many correlations": "[uncertainty]\ncorrelations = ["
    + '{ between = ["states.1.pressure", "x"], coefficient = 1 },' * 4000
    + "]\n",
}


@pytest.mark.parametrize("name", LARGE)
def test_a_large_hostile_file_is_refused_soon(name: str, tmp_path: Path) -> None:
    write(tmp_path, HEAD + LARGE[name])
    begin = time.perf_counter()
    with pytest.raises(InputError) as caught:
        spec.read(tmp_path)
    assert len(caught.value.faults) <= 201
    assert max(len(str(fault)) for fault in caught.value.faults) < 2000
    # A bound against growth with the square of the size, generous for a busy machine.
    assert time.perf_counter() - begin < 10.0
