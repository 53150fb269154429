"""The Record: canonical bytes, loading, look-ups."""

from __future__ import annotations

import math
from pathlib import Path

import numpy as np
import pytest

from reportgen.errors import InputError
from reportgen.record import FORMAT, Record, canonical, canonical_json


def small_record() -> Record:
    return Record(
        {
            "calculation": {"number": "X-1", "revision": "A", "coverage_factor": 2.0},
            "inputs": {"states.1.pressure": {"value": 1e5}},
            "values": {
                "states.1.pressure": {"value": 1e5, "standard_uncertainty": 10.0, "from": ["states.1.pressure"]},
                "states.1.density": {
                    "value": 1.2,
                    "standard_uncertainty": None,
                    "from": ["states.1.pressure", "fluids.air"],
                },
                "equipment.C.power": {"value": math.nan, "standard_uncertainty": None, "from": ["states.1.density"]},
            },
        }
    )


def test_floats_keep_twelve_significant_digits_and_no_negative_zero() -> None:
    assert canonical(1 / 3) == 0.333333333333
    assert canonical_json({"a": -0.0}) == b'{\n "a": 0.0\n}\n'
    assert canonical(123456789.0123456) == 123456789.012


def test_not_a_number_and_infinity_become_null() -> None:
    assert canonical([math.nan, math.inf, -math.inf]) == [None, None, None]


def test_numpy_values_become_plain_json() -> None:
    data = canonical(
        {"a": np.float64(1.5), "b": np.arange(3), "c": np.bool_(True), "d": (np.int64(2),), "e": np.str_("t")}
    )
    assert data == {"a": 1.5, "b": [0, 1, 2], "c": True, "d": [2], "e": "t"}
    assert [type(entry) for entry in (data["a"], data["c"], data["e"])] == [float, bool, str]


def test_an_object_is_refused_rather_than_written_by_its_repr() -> None:
    with pytest.raises(TypeError, match="Path"):
        canonical({"file": Path("x")})
    with pytest.raises(TypeError, match="keys"):
        canonical({1: "x"})


def test_keys_are_sorted_text_is_utf8_and_lines_end_in_lf() -> None:
    assert canonical_json({"b": "ṁ\r", "a": 1}) == '{\n "a": 1,\n "b": "ṁ\\r"\n}\n'.encode()


def test_equal_data_in_another_order_gives_equal_bytes_and_loads_back(tmp_path: Path) -> None:
    record = small_record()
    shuffled = Record(dict(reversed(list(record.data.items()))))
    assert shuffled.to_json() == record.to_json()
    file = tmp_path / "record.json"
    file.write_bytes(record.to_json())
    assert Record.load(file) == record
    assert list(Record.load(file).values) == list(record.values) == sorted(record.values)
    assert Record.load(file).to_json() == record.to_json()


def test_look_ups() -> None:
    record = small_record()
    assert (record.number, record.revision) == ("X-1", "A")
    assert record.value("states.1.density") == 1.2
    assert record.value("equipment.C.power") is None
    assert record.value("states.9.density") is None
    assert record.expanded_uncertainty("states.1.pressure") == 20.0
    assert record.expanded_uncertainty("states.1.density") is None
    assert list(record.ancestors("equipment.C.power")) == ["states.1.density", "states.1.pressure", "fluids.air"]


@pytest.mark.parametrize(
    ("content", "message"),
    [
        (b"{", "not JSON"),
        (b"\xff", "not JSON"),
        (b"[" * 100_000, "not JSON"),
        (b'{"format": NaN}', "NaN is not a finite number"),
        (b'{"format": 1e999}', "1e999 is not a finite number"),
        (b'{"format": 1, "format": 2}', "a key twice"),
        (b"[]", "not a record"),
        (b'{"format": "other/1"}', "not a record"),
        (b'{"format": "reportgen-record/1", "values": []}', "missing or of the wrong type"),
    ],
)
def test_what_is_no_record_is_refused(content: bytes, message: str) -> None:
    with pytest.raises(InputError, match=message):
        Record.load(content)


def test_entries_that_cannot_be_looked_up_are_named_on_loading() -> None:
    data = small_record().data
    data["calculation"] = {"number": 7, "revision": "A", "coverage_factor": True}
    data["values"]["states.1.density"] = 1.2
    data["values"]["states.1.pressure"]["from"] = "states.1.pressure"
    with pytest.raises(InputError) as caught:
        Record.load(canonical_json(data))
    assert [fault.path for fault in caught.value.faults] == [
        "calculation.number",
        "calculation.coverage_factor",
        "values: states.1.density",
        "values: states.1.pressure",
    ]


def test_a_missing_file_is_an_input_error(tmp_path: Path) -> None:
    with pytest.raises(InputError, match="cannot be read"):
        Record.load(tmp_path / "none.json")


def test_the_format_is_stated() -> None:
    assert small_record().data["format"] == FORMAT
