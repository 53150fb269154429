"""What a well-formed calculation folder is read as."""

from __future__ import annotations

import hashlib
from pathlib import Path

import pytest

from reportgen import spec
from reportgen.errors import Fault, InputError
from reportgen.spec import Correlation
from tests.spec.writing import FLUIDS, HEAD, SURROUNDINGS, TITLE, faults, read, write

TWO_STATES = """
[states.1]
fluid       = "steam"
pressure    = "39.0 bar(g) ± 0.3 bar"
temperature = { value = "400 degC ± 1.5 K", source = "TT-301" }
mass_flow   = "5.2 t/h ± 2 %"

[states.2]
fluid    = "steam"
title    = "behind the valve"
pressure = "9.0 bar(g)"

[equipment.PRV-3]
kind   = "throttling-valve"
inlet  = "1"
outlet = "2"
"""


def test_title_block_surroundings_and_fluids(tmp_path: Path) -> None:
    calculation = read(tmp_path, HEAD + TWO_STATES)
    assert (calculation.number, calculation.revision, calculation.date) == ("BR-TH-1", "A", "2026-01-20")
    assert (calculation.units, calculation.client, calculation.checker) == ("SI", None, None)
    assert calculation.inputs["surroundings.temperature"].quantity.value == pytest.approx(288.15)
    assert calculation.inputs["surroundings.pressure"].quantity.value == pytest.approx(101_300.0)
    assert calculation.fluids["steam"].substance == "water"
    assert calculation.fluids["steam"].reference_state == "published"
    assert calculation.fluids["air"].composition == {"N2": 0.79, "O2": 0.21}
    assert calculation.fluids["air"].heat_capacity is None
    assert calculation.trains == {}
    assert calculation.uncertainty.coverage_factor == 2.0


def test_inputs_carry_their_place_and_the_variable_they_fix(tmp_path: Path) -> None:
    calculation = read(tmp_path, HEAD + TWO_STATES)
    pressure = calculation.inputs["states.1.pressure"]
    assert pressure.quantity.value == pytest.approx(39.0e5 + 101_300.0)
    assert pressure.quantity.gauge
    assert pressure.applies_to == ("states.1.pressure",)
    line = (HEAD + TWO_STATES).splitlines().index('pressure    = "39.0 bar(g) ± 0.3 bar"') + 1
    assert (pressure.file, pressure.line, pressure.column) == ("calculation.toml", line, 15)
    assert calculation.inputs["states.1.temperature"].quantity.source == "TT-301"
    assert calculation.states["2"].title == "behind the valve"
    piece = calculation.equipment["PRV-3"]
    assert (piece.kind, piece.ports, piece.limits) == ("throttling-valve", {"inlet": ("1",), "outlet": ("2",)}, None)


def test_the_coverage_factor_of_the_file_is_that_of_every_uncertainty(tmp_path: Path) -> None:
    twofold = read(tmp_path, HEAD + TWO_STATES).inputs["states.1.pressure"].quantity
    threefold = (
        read(tmp_path, HEAD + "\n[uncertainty]\ncoverage_factor = 3.0\n" + TWO_STATES)
        .inputs["states.1.pressure"]
        .quantity
    )
    assert twofold.standard_uncertainty == pytest.approx(0.3e5 / 2)
    assert threefold.standard_uncertainty == pytest.approx(0.3e5 / 3)


def test_a_state_like_another_shares_its_givens_but_not_those_it_states_itself(tmp_path: Path) -> None:
    more = '\n[states.3]\nlike = "1"\n\n[states.4]\nlike = "3"\nmass_flow = "1 kg/s"\n'
    calculation = read(tmp_path, HEAD + TWO_STATES + more)
    assert calculation.inputs["states.1.pressure"].applies_to == (
        "states.1.pressure",
        "states.3.pressure",
        "states.4.pressure",
    )
    assert calculation.inputs["states.1.mass_flow"].applies_to == ("states.1.mass_flow", "states.3.mass_flow")
    assert calculation.inputs["states.4.mass_flow"].applies_to == ("states.4.mass_flow",)
    assert [state.fluid for state in calculation.states.values()] == ["steam"] * 4


def test_an_own_flow_takes_the_place_of_any_copied_flow(tmp_path: Path) -> None:
    more = '\n[states.3]\nlike = "1"\nvolume_flow = "2 m3/s"\n'
    calculation = read(tmp_path, HEAD + TWO_STATES + more)
    assert calculation.inputs["states.1.mass_flow"].applies_to == ("states.1.mass_flow",)
    assert calculation.inputs["states.3.volume_flow"].applies_to == ("states.3.volume_flow",)


def test_a_volume_flow_at_normal_conditions_fixes_the_molar_flow(tmp_path: Path) -> None:
    text = HEAD + '\n[states.1]\nfluid = "air"\nvolume_flow = "900 Nm3/h"\n\n[states.2]\nlike = "1"\n'
    flow = read(tmp_path, text).inputs["states.1.volume_flow"]
    assert flow.quantity.dimension == "molar_flow"
    assert flow.applies_to == ("states.1.molar_flow", "states.2.molar_flow")
    # 900 m3/h of ideal gas at 273.15 K and 101325 Pa; R of the SI (exact)
    assert flow.quantity.value == pytest.approx(900 / 3600 * 101_325 / (8.31446261815324 * 273.15))


def test_heat_ports_are_counted_from_one(tmp_path: Path) -> None:
    text = (
        HEAD
        + """
[states.1]
fluid = "steam"

[states.2]
fluid = "steam"

[equipment.CV-1]
kind       = "control-volume"
inlets     = ["1"]
outlets    = ["2"]
power      = "3 kW"
heat_ports = [
  { heat = "20 kW", temperature = "150 degC" },
  { heat = "-5 kW" },
]
"""
    )
    calculation = read(tmp_path, text)
    given = [path for path in calculation.inputs if path.startswith("equipment")]
    assert given == [
        "equipment.CV-1.power",
        "equipment.CV-1.heat_ports.1.heat",
        "equipment.CV-1.heat_ports.1.temperature",
        "equipment.CV-1.heat_ports.2.heat",
    ]
    assert calculation.equipment["CV-1"].options == {"heat_ports": 2}
    line = text.splitlines().index('  { heat = "-5 kW" },') + 1
    assert calculation.locate("equipment.CV-1.heat_ports.2.heat") == ("calculation.toml", line, 12)


def test_everything_else_a_file_can_say(tmp_path: Path) -> None:
    text = (
        HEAD.replace('"A"', '"B"')
        + TWO_STATES
        + """
[states.3]
like = "2"

[equipment.TG-2]
kind   = "turbine"
inlet  = "1"
outlet = "3"

[equipment.TG-2.limits]
pressure            = "45 bar(g)"
minimum_temperature = "-10 degC"
material            = "alloy steel"

[trains.valve]
title     = "Valve"
equipment = ["PRV-3"]

[trains.turbine]
title          = "Turbine"
equipment      = ["TG-2"]
alternative_to = "valve"

[assumptions.A1]
text   = "Velocities are low."
basis  = "Line sizing"
status = "to be verified"
due    = 2026-05-01

[criteria.C1]
value    = "equipment.TG-2.power"
at_least = "275 kW"

[criteria.C2]
value   = "states.2.temperature"
at_most = "400 degC"
basis   = "Header"

[references.R1]
text = "Steam tables"

[[revisions]]
index       = "A"
date        = 2026-01-20
description = "First issue"

[[revisions]]
index       = "B"
date        = 2026-02-20
description = "Turbine added"

[uncertainty]
method       = "first-order"
correlations = [{ between = ["states.1.pressure", "states.1.temperature"], coefficient = 0.5 }]

[cautions.T10]
limit  = "14 %"
reason = "Vendor accepts it"
"""
    )
    calculation = read(tmp_path, text)
    limits = calculation.equipment["TG-2"].limits
    assert limits is not None
    assert limits.pressure is not None
    assert limits.pressure.value == pytest.approx(46.013e5)
    assert (limits.temperature, limits.material) == (None, "alloy steel")
    assert calculation.trains["turbine"].alternative_to == "valve"
    assert calculation.trains["valve"].equipment == ("PRV-3",)
    assert (calculation.assumptions["A1"].due, calculation.assumptions["A1"].owner) == ("2026-05-01", None)
    at_least = calculation.criteria["C1"].at_least
    assert at_least is not None
    assert (at_least.value, at_least.dimension, calculation.criteria["C1"].at_most) == (275e3, "power", None)
    assert calculation.references["R1"].text == "Steam tables"
    assert [row.index for row in calculation.revisions] == ["A", "B"]
    line = next(number for number, row in enumerate(text.splitlines(), 1) if row.startswith("correlations"))
    assert calculation.uncertainty.correlations == (
        Correlation("states.1.pressure", "states.1.temperature", 0.5, line),
    )
    assert calculation.cautions["T10"].limit is not None
    assert calculation.cautions["T10"].limit.value == pytest.approx(0.14)


def test_narratives_know_where_they_stand(tmp_path: Path) -> None:
    (tmp_path / "texts").mkdir()
    (tmp_path / "texts" / "method.md").write_bytes(b"\xef\xbb\xbfSteady flow.\r\nNo storage.\r\n")
    title = TITLE + 'purpose = """\nWhy.\n"""\nmethod_file = "texts/method.md"\nconclusion = "Wasteful."\n'
    calculation = read(tmp_path, title + SURROUNDINGS + FLUIDS + TWO_STATES)
    purpose, method, conclusion = (calculation.narratives[key] for key in ("purpose", "method", "conclusion"))
    assert (purpose.text, purpose.file, purpose.line) == ("Why.\n", "calculation.toml", 9)
    assert (method.text, method.file, method.line) == ("Steady flow.\nNo storage.\n", "texts/method.md", 1)
    assert (conclusion.text, conclusion.line) == ("Wasteful.", 12)
    assert calculation.files.keys() == {"calculation.toml", "texts/method.md"}
    assert hashlib.sha256(calculation.files["texts/method.md"]).hexdigest() == (
        hashlib.sha256((tmp_path / "texts" / "method.md").read_bytes()).hexdigest()
    )


def test_a_path_is_located_at_its_nearest_parent(tmp_path: Path) -> None:
    text = HEAD + TWO_STATES
    calculation = read(tmp_path, text)
    line = text.splitlines().index("[states.2]") + 1
    assert calculation.locate("states.2.temperature") == ("calculation.toml", line, 9)
    assert calculation.locate("total.lost_work") == ("calculation.toml", 1, 1)
    assert calculation.locate("") == ("calculation.toml", 1, 1)


def test_a_byte_order_mark_and_windows_line_ends_are_accepted(tmp_path: Path) -> None:
    content = "\N{ZERO WIDTH NO-BREAK SPACE}" + (HEAD + TWO_STATES).replace("\n", "\r\n")
    (tmp_path / "calculation.toml").write_bytes(content.encode("utf-8"))
    assert spec.read(tmp_path).locate("calculation.number") == ("calculation.toml", 2, 12)


def test_a_file_in_another_encoding_is_refused_with_the_place(tmp_path: Path) -> None:
    (tmp_path / "calculation.toml").write_bytes((HEAD + 'x = "40 ± 2"\n').encode("latin-1"))
    with pytest.raises(InputError, match=r"calculation\.toml:\d+:9: The file is not UTF-8 text"):
        spec.read(tmp_path)


def test_a_fault_in_each_file_is_reported_at_once(tmp_path: Path) -> None:
    (tmp_path / "purpose.md").write_bytes(b"fine\nnot \xff\n")
    found = faults(tmp_path, TITLE + 'purpose_file = "purpose.md"\nclient = 3\n' + SURROUNDINGS + FLUIDS + TWO_STATES)
    assert [fault.place for fault in found] == ["calculation.toml:9:10", "purpose.md:2:5"]


def test_alternative_trains_may_share_an_inlet_but_no_outlet(tmp_path: Path) -> None:
    trains = """
[equipment.TG-2]
kind   = "turbine"
inlet  = "1"
outlet = "{outlet}"

[states.3]
fluid = "steam"

[trains.valve]
title     = "Valve"
equipment = ["PRV-3"]

[trains.turbine]
title          = "Turbine"
equipment      = ["TG-2"]
alternative_to = "valve"
"""
    assert faults(tmp_path, HEAD + TWO_STATES + trains.format(outlet="3")) == []
    shared = faults(tmp_path, HEAD + TWO_STATES + trains.format(outlet="2"))
    assert [fault.path for fault in shared] == ["equipment.TG-2.outlet"]


def test_very_many_faults_are_listed_up_to_a_bound(tmp_path: Path) -> None:
    states = "".join(f'\n[states.s{number}]\nfluid = "stem"\npresure = "1"\n' for number in range(1500))
    found = faults(tmp_path, HEAD + states)
    assert len(found) == 201
    assert "2800 further faults" in found[-1].message


def test_there_is_no_calculation_file(tmp_path: Path) -> None:
    with pytest.raises(InputError, match=r"calculation\.toml: The file cannot be read"):
        spec.read(tmp_path)


def test_a_confirmed_document_with_everything_verified_is_accepted(tmp_path: Path) -> None:
    history = '\n[[revisions]]\nindex = "A"\ndate = 2026-01-20\ndescription = "First"\n'
    text = HEAD.replace('"preliminary"', '"confirmed"') + TWO_STATES + history
    assert faults(tmp_path, text) == []
    assert write(tmp_path, text) == tmp_path


def test_what_the_property_models_refuse_is_reported_with_the_other_faults(tmp_path: Path) -> None:
    def refuse(fluid: spec.FluidSpec) -> None:
        if fluid.composition is not None:
            raise InputError(Fault("This gas is not carried.", found="O2"))
        raise InputError(Fault("No such fluid.", found="x"))

    more = """
[fluids.oil]
model           = "real-fluid"
substance       = "oil"
reference_state = "NPB"

[fluids.bad]
model = "real-fluid"

[states.1]
fluid = "stem"
"""
    write(tmp_path, HEAD + more)
    with pytest.raises(InputError) as caught:
        spec.read(tmp_path, refuse)
    assert [fault.path for fault in caught.value.faults] == [
        "fluids.steam.substance",
        "fluids.air.composition.O2",
        "fluids.oil.substance",
        "fluids.oil.reference_state",
        "fluids.bad.substance",
        "states.1.fluid",
    ]
    assert [fault.line for fault in caught.value.faults] == [15, 20, 24, 25, 27, 31]
