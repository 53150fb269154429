"""Malformed calculation files: every fault of each, at its line and column, and nothing else."""

from __future__ import annotations

import shutil
from pathlib import Path

import pytest

from reportgen import spec
from reportgen.errors import InputError

FOLDER = Path(__file__).parent / "malformed"

#: For each file the faults in the order of the file: line and column, path, and words that must be in the message.
EXPECTED: dict[str, list[tuple[str | None, ...]]] = {
    "backslashes": [
        ("6:12", "calculation.owner", "The text holds a backslash or control character that TOML"),
        ("25:45", "states.2.pressure.source", "The text holds a backslash or control character that TOML"),
    ],
    "bare-psi": [
        ("19:15", "states.1.pressure", 'The unit "psi" is ambiguous'),
        ("25:12", "states.2.pressure", 'The unit "psi" is ambiguous'),
    ],
    "caution-faults": [
        ("32:11", "cautions.moisture", "This is not the number of a caution"),
        ("35:11", "cautions.T10.reason", '"reason" is missing'),
        ("39:10", "cautions.T19.limit", '"kW" is a unit of a power, but a ratio or a temperature or a'),
    ],
    "combustor-faults": [
        ("16:1", "fluids.fuel.chemistry", "Only the products of a combustor have a chemistry"),
        ("25:17", "fluids.flue.chemistry", 'This is not a value that "chemistry" can have'),
        ("26:1", "fluids.flue.substance", "The composition of the products follows from the flows into the combustor"),
        ("27:1", "fluids.flue.heat_capacity", "The composition of the products follows from the flows into the comb"),
        ("31:15", "fluids.smoke.products_of", "There is no combustor of this tag", 'Did you mean "B-1"?'),
        ("35:15", "fluids.vapour.products_of", "There is no combustor of this tag"),
        ("40:1", "fluids.liquid.products_of", 'There is no key "products_of" here'),
        ("58:1", "states.4.second_source", "The products of a combustor have no second source"),
        ("67:14", "equipment.B-1.outlet", "The state is of fluid air, which is not the product of this combustor"),
        ("68:14", "equipment.B-1.excess_air", "The value is outside what is possible", "An excess of 20 percent"),
        ("69:1", "equipment.B-1.oxidant", 'There is no key "oxidant" here'),
    ],
    "composition-faults": [
        ("16:1", "fluids.air.composition", "The composition does not say what its fractions count"),
        ("16:15", "fluids.air.composition", "The fractions do not add up to 1"),
        ("34:9", "fluids.nothing", "No substance is given"),
        ("40:1", "fluids.both.composition", "Both substance and composition are given"),
        ("41:17", "fluids.both.basis", 'This is not a value that "basis" can have', 'Did you mean "mole"?'),
        ("42:17", "fluids.both.heat_capacity", "There is no number where one is needed"),
        ("47:24", "fluids.wet.composition.N2", "The value is outside what is possible"),
        ("47:35", "fluids.wet.composition.H2O", "The value is outside what is possible"),
        ("48:17", "fluids.wet.heat_capacity", '"kJ/kg" is a unit of a specific energy, but a specific'),
        ("53:17", "fluids.helium.heat_capacity", "An uncertainty has no meaning here"),
    ],
    "confirmed-too-early": [
        ("7:1", "calculation.status", "A confirmed document needs its revision history"),
        ("20:54", "states.1.temperature.status", "The document is confirmed, but this is still to be verified"),
        ("35:10", "assumptions.A1.status", "The document is confirmed, but this is still to be verified"),
        ("45:10", "assumptions.A3.status", "The document is confirmed, but this is still to be verified"),
    ],
    "correlations-that-cannot-be": [
        ("33:19", "uncertainty.coverage_factor", "The value does not fit"),
        ("35:76", "uncertainty.correlations.1.coefficient", "The value does not fit"),
        ("36:37", "uncertainty.correlations.2.between.2", "This input has no uncertainty that could be correlated"),
        ("37:15", "uncertainty.correlations.3.between", "The value does not fit"),
        (
            "38:16",
            "uncertainty.correlations.4.between.1",
            "No quantity is given at this path",
            'Did you mean "states.1.pressure"?',
        ),
        ("39:74", "uncertainty.correlations.5.coefficient", "This is not the type of value that belongs here"),
        (
            "40:15",
            "uncertainty.correlations.6.between",
            "The correlation of these two inputs is already stated at line",
        ),
        ("41:38", "uncertainty.correlations.7.between.2", "An input is not correlated with itself"),
    ],
    "correlations-that-contradict": [
        ("33:16", "uncertainty.correlations", "The correlations contradict one another"),
    ],
    "criteria-that-decide-nothing": [
        ("35:1", "criteria.C1.at_least", "Both at_most and at_least are given"),
        ("37:11", "criteria.C2", "The criterion has no limit"),
        ("43:11", "criteria.C3.at_most", "An uncertainty has no meaning here"),
        ("47:11", "criteria.C4.at_most", '"bar" is a unit of a pressure, but a temperature is needed'),
        ("50:11", "criteria.C5.value", 'No value can have this path. There is no "lost_wrok" among'),
        ("54:11", "criteria.C6.value", "No value can have this path. A path is states.<id>.<name>,"),
        ("58:11", "criteria.C7.value", 'No value can have this path. There is no "phase" among the'),
    ],
    "cubic-faults": [
        (
            "15:22",
            "fluids.gas.equation",
            'This is not a value that "equation" can have',
            'Did you mean "Peng-Robinson"?',
        ),
        ("16:1", "fluids.gas.composition", "The composition does not say what its fractions count"),
        ("16:22", "fluids.gas.composition", "The fractions do not add up to 1"),
        ("17:43", "fluids.gas.interaction.1.between.2", "This substance is not in the fluid"),
        ("17:93", "fluids.gas.interaction.2.between.2", "A substance has no interaction with itself"),
        ("17:115", "fluids.gas.interaction.2.coefficient", "The value does not fit"),
        ("18:30", "fluids.gas.volume_translation.CO2", '"kg" is a unit of a mass, but a molar volume is needed'),
        ("18:38", "fluids.gas.volume_translation.H2", "This substance is not in the fluid"),
        ("21:19", "fluids.gas.critical.CO2.temperature", '"bar" is a unit of a pressure, but a temperature is needed'),
        (
            "22:19",
            "fluids.gas.critical.CO2.pressure",
            "An uncertainty has no meaning here: it would not be carried into any result",
        ),
        ("23:19", "fluids.gas.critical.CO2.acentric_factor", "This is not the type of value that belongs here"),
        ("25:9", "fluids.ethane.equation", '"equation" is missing'),
        (
            "28:22",
            "fluids.ethane.volume_translation",
            'This is not a value that "volume_translation" can have',
            'Did you mean "Peneloux"?',
        ),
        ("29:24", "fluids.ethane.critical.ethan", "This substance is not in the fluid", 'Did you mean "ethane"?'),
        ("29:59", "fluids.ethane.critical.ethan.presure", 'There is no key "presure" here', 'Did you mean "pressure"?'),
        (
            "36:76",
            "fluids.blend.interaction.2.between",
            "The coefficient of these two substances is already given at line 36",
        ),
        ("36:114", "fluids.blend.interaction.3.betwen", 'There is no key "betwen" here', 'Did you mean "between"?'),
        ("36:171", "fluids.blend.interaction.4.between", "The value does not fit"),
        ("38:9", "fluids.none", "No substance is given"),
    ],
    "dates-in-quotes": [
        ("5:12", "calculation.date", "This is not a date"),
        ("36:10", "assumptions.A1.due", "This is not a date"),
        ("40:15", "revisions.1.date", "This is not a value"),
        ("45:15", "revisions.2.date", "This is not a date"),
    ],
    "dependent-givens": [
        ("23:1", "states.1.quality", "An ideal gas does not condense"),
        ("29:1", "states.2.specific_enthalpy", "temperature and specific_enthalpy cannot both be given"),
        ("44:1", "states.7.quality", "superheat and quality cannot both be given"),
        ("49:1", "states.8.specific_volume", "density and specific_volume cannot both be given"),
    ],
    "duplicate-keys-and-tags": [
        ("7:1", "calculation.revision", "This name is already there at line 4"),
        ("21:1", "states.1.pressure", "This name is already there at line 20"),
        ("34:12", "equipment.PRV-3", "This name is already there at line 29"),
        ("39:12", "equipment.prv-3", "The tag differs from PRV-3 at line 29 in capitals only"),
    ],
    "efficiency-in-percent": [
        (
            "33:25",
            "equipment.K-1.isentropic_efficiency",
            "An efficiency is above 0 and at most 1",
            'Did you mean "78 %"?',
        ),
        ("39:25", "equipment.K-2.isentropic_efficiency", "An efficiency is above 0 and at most 1"),
        ("40:25", "equipment.K-2.pressure_ratio", "The value is outside what is possible"),
    ],
    "gauge-atmosphere": [
        ("11:15", "surroundings.pressure", "A gauge pressure needs the pressure of the surroundings"),
    ],
    "heat-ports": [
        ("37:12", "equipment.CV-1.heat_ports.2.heat", "The unit is missing"),
        (
            "37:18",
            "equipment.CV-1.heat_ports.2.temprature",
            'There is no key "temprature" here',
            'Did you mean "temperature"?',
        ),
        ("38:3", "equipment.CV-1.heat_ports.3", "This is not the type of value that belongs here"),
    ],
    "ids-that-are-no-path-parts": [
        ("27:12", "equipment.PRV 3.1", "This name cannot be part of a path"),
        ("32:9", "states.inlet.a", "This name cannot be part of a path"),
        ("35:14", "assumptions._A1", "This name cannot be part of a path"),
        ("38:10", "assumptions._A1.status", 'This is not a value that "status" can have', 'Did you mean "accepted"?'),
    ],
    "impossible-values": [
        ("19:15", "states.1.pressure", "A pressure must be above a perfect vacuum"),
        ("20:15", "states.1.temperature", "A temperature must be above absolute zero"),
        ("21:15", "states.1.mass_flow", "A mass flow cannot be negative"),
        ("31:17", "equipment.PRV-3.pressure_drop", "The value is outside what is possible"),
        ("36:12", "states.3.quality", "The value is outside what is possible"),
    ],
    "incompressible-faults": [
        ("13:9", "fluids.oil.density", '"density" is missing'),
        ("15:100", "fluids.oil.specific_heat.2.temperature", "The temperatures of the rows do not rise"),
        (
            "15:127",
            "fluids.oil.specific_heat.2.specific_heat",
            '"kJ" is a unit of an energy, but a specific heat capacity is needed',
        ),
        ("16:23", "fluids.oil.phase", 'This is not a value that "phase" can have'),
        ("17:23", "fluids.oil.maximum_temperature", "The range goes beyond the rows of the specific heat"),
        ("22:44", "fluids.glycol.specific_heat.coefficients.2", "This is not the type of value that belongs here"),
        ("22:57", "fluids.glycol.specific_heat.unit", 'This is not a value that "unit" can have'),
        ("22:63", "fluids.glycol.specific_heat.abuot", 'There is no key "abuot" here', 'Did you mean "about"?'),
        ("24:23", "fluids.glycol.maximum_temperature", "The maximum temperature is not above the minimum temperature"),
        ("26:9", "fluids.steel", '"minimum_temperature" is missing'),
        ("26:9", "fluids.steel", '"maximum_temperature" is missing'),
        (
            "29:17",
            "fluids.steel.density",
            "An uncertainty has no meaning here: it would not be carried into any result",
        ),
        (
            "30:17",
            "fluids.steel.specific_heat",
            '"kJ/kg" is a unit of a specific energy, but a specific heat capacity is needed',
        ),
        ("35:17", "fluids.one-row.specific_heat", "The value does not fit"),
        ("40:23", "fluids.brine.specific_heat", "The value is outside what is possible"),
        ("47:1", "states.1.quality", "An incompressible fluid does not change its phase"),
        (
            "48:15",
            "states.1.volume_flow",
            "An incompressible fluid has no molar mass, by which an amount of substance would become a mass",
        ),
        ("53:1", "states.2.density", "The density is given with the incompressible fluid"),
        (
            "54:14",
            "states.2.molar_flow",
            "An incompressible fluid has no molar mass, by which an amount of substance would become a mass",
        ),
        (
            "59:1",
            "states.3.specific_entropy",
            "temperature and specific_entropy cannot both be given: without compression one follows from the other",
        ),
    ],
    "later-breadth": [
        ("32:2", "cases", "Cases are not carried by this version"),
        ("35:2", "sweeps", "Sweeps are not carried by this version"),
        ("38:2", "readings", "Readings of a test log are not carried by this version"),
        ("42:10", "uncertainty.method", "The Monte Carlo method is not carried by this version"),
        ("43:1", "uncertainty.draws", "The Monte Carlo method is not carried by this version"),
        ("44:1", "uncertainty.seed", "The Monte Carlo method is not carried by this version"),
    ],
    "likeness-in-a-circle": [
        ("33:8", "states.3.like", "A state cannot be like itself, not by way of others either"),
        ("43:1", "states.6.quality", "More than two quantities are given that each help to fix the"),
        ("45:9", "states.7.fluid", '"fluid" is missing'),
    ],
    "limits-faults": [
        ("33:23", "equipment.PRV-3.limits.pressure", "An uncertainty has no meaning here"),
        (
            "35:23",
            "equipment.PRV-3.limits.minimum_temperature",
            "The minimum temperature is not below the maximum temperature",
        ),
        (
            "36:1",
            "equipment.PRV-3.limits.max_temperature",
            'There is no key "max_temperature" here',
            'Did you mean "temperature"?',
        ),
        ("37:23", "equipment.PRV-3.limits.source", "This is not the type of value that belongs here"),
        ("43:1", "equipment.PRV-4.limits", "The limits hold no limit"),
    ],
    "missing-narratives": [
        ("7:1", "calculation.purpose_file", "The purpose is given twice"),
        ("8:15", "calculation.method_file", "The file must be in the folder of the calculation"),
        ("9:19", "calculation.conclusion_file", "The file must be in the folder of the calculation"),
    ],
    "missing-units": [
        ("11:15", "surroundings.pressure", "The unit is missing"),
        ("20:15", "states.1.temperature", "The unit is missing"),
        ("21:15", "states.1.mass_flow", "The unit is missing"),
    ],
    "misspelt-keys": [
        ("6:1", "calculation.ownr", 'There is no key "ownr" here', 'Did you mean "owner"?'),
        ("19:1", "states.1.presure", 'There is no key "presure" here', 'Did you mean "pressure"?'),
        ("30:1", "equipment.PRV-3.outlt", 'There is no key "outlt" here', 'Did you mean "outlet"?'),
    ],
    "misspelt-kinds": [
        ("14:13", "fluids.steam.model", 'This is not a value that "model" can have', 'Did you mean "real-fluid"?'),
        (
            "28:10",
            "equipment.PRV-3.kind",
            'This is not a value that "kind" can have',
            'Did you mean "throttling-valve"?',
        ),
        ("32:12", "equipment.X-1.kind", '"kind" is missing'),
        ("37:8", "equipment.X-2.kind", 'This is not a value that "kind" can have'),
    ],
    "nested-too-deep": [
        ("31:20", "equipment.PRV-3.note.1.1.1.1.1.1.1.1.1.1.1.1", "Brackets are nested too deep"),
    ],
    "no-surroundings": [
        ("1:1", "surroundings", '"surroundings" is missing'),
    ],
    "nothing-in-it": [
        ("1:1", "calculation", '"calculation" is missing'),
        ("1:1", "surroundings", '"surroundings" is missing'),
        ("1:1", None, "The file holds nothing to evaluate"),
    ],
    "odds-and-ends": [
        ("3:12", "calculation.title", "The text holds a line break or control character"),
        ("7:12", "calculation.client", "This is not the type of value that belongs here", "Found: true"),
        ("34:23", "equipment.PRV-3.limits.temperature", "The unit is missing"),
        ("35:23", "equipment.PRV-3.limits.minimum_temperature", "A temperature must be above absolute zero"),
        ("40:1", "fluids.nitrogen.basis", "A single substance has no basis"),
        ("43:3", "criteria", "This is not the type of value that belongs here", "a table"),
        ("47:5", "trains.a", "This is not the type of value that belongs here", "a table"),
        ("49:10", "trains.a", "This name is already there at line 47"),
        ("53:8", "states.n0.like", "The likeness goes from state to state too often"),
        ("56:8", "states.n1.like", "The likeness goes from state to state too often"),
        ("59:8", "states.n2.like", "The likeness goes from state to state too often"),
        ("91:1", "states.n12", "The key is too long"),
    ],
    "over-specified-state": [
        ("22:1", "states.1.mass_flow", "The flow of this state is given more than once"),
        ("28:1", "states.2.specific_enthalpy", "More than two quantities are given that each help to fix the"),
    ],
    "pathological-numbers": [
        ("21:15", "states.1.mass_flow", "The unit is missing"),
        ("25:12", "states.2.pressure", "The number cannot be read"),
        ("31:1", "equipment.PRV-3.isentropic_efficiency", 'There is no key "isentropic_efficiency" here'),
        ("32:17", "equipment.PRV-3.pressure_drop", "This is not a value"),
        ("38:25", "equipment.K-9.isentropic_efficiency", "The number is too large, or none at all"),
        ("39:25", "equipment.K-9.pressure_ratio", "The number is too large, or none at all"),
    ],
    "percent-of-a-temperature": [
        ("20:15", "states.1.temperature", "A percentage of a temperature depends on the scale it is"),
        ("21:15", "states.1.mass_flow", "After ±"),
    ],
    "ports-of-the-wrong-form": [
        ("29:10", "equipment.PRV-3.inlet", "This is not the type of value that belongs here"),
        ("40:10", "equipment.M-1.inlets", "This is not the type of value that belongs here"),
        ("41:10", "equipment.M-1.outlet", "This is not the type of value that belongs here"),
        ("46:11", "equipment.S-1.outlets", "The value does not fit"),
        ("48:12", "equipment.E-1.hot_outlet", '"hot_outlet" is missing'),
        ("48:12", "equipment.E-1.cold_outlet", '"cold_outlet" is missing'),
        ("51:1", "equipment.E-1.cold_in", 'There is no key "cold_in" here', 'Did you mean "cold_inlet"?'),
    ],
    "process-faults": [
        ("25:15", "states.1.volume", "A volume must be above zero"),
        ("32:1", "states.3.mass_flow", "State 3 belongs to the closed system of process P-4 and"),
        ("34:12", "processes.P-1", "The process belongs to no train"),
        ("35:20", "processes.P-1.kind", 'This is not a value that "kind" can have'),
        ("39:12", "processes.P-2", "The process belongs to no train"),
        ("42:20", "processes.P-2.to", "The content is of another fluid after the process than before"),
        ("43:1", "processes.P-2.polytropic_indx", 'There is no key "polytropic_indx" here'),
        ("45:12", "processes.P-3", "The process belongs to no train"),
        ("47:8", "processes.P-3.from", "Only one state is given where several are brought together"),
        ("48:8", "processes.P-3.to", "Each body has one state before and one after"),
        ("48:9", "processes.P-3.to.1", "The process begins and ends with the same state"),
        ("48:14", "processes.P-3.to.2", "There is no such state"),
        ("50:12", "processes.P-4", "The process belongs to no train"),
        ("52:13", "processes.P-4.from.1", "State 1 already begins process P-2 at line 41; its mass"),
        ("53:13", "processes.P-4.to.1", "State 2 already ends process P-3 at line 48; its mass would"),
        ("53:18", "processes.P-4.to.2", "The content is of another fluid after the process than before"),
        ("53:18", "processes.P-4.to.2", "State 2 already ends process P-3 at line 48; its mass would"),
        ("54:23", "processes.P-4.constant.2", 'This is not a value that "constant" can have'),
        ("56:12", "processes.p-4.to", '"to" is missing'),
        ("56:12", "processes.p-4", "The process belongs to no train"),
        ("56:12", "processes.p-4", "The tag is already that of a process, at line 50, or"),
        ("58:8", "processes.p-4.from", "This is not the type of value that belongs here"),
        ("58:9", "processes.p-4.from.1", "State 1 already begins process P-2 at line 41; its mass"),
        ("59:8", "processes.p-4.heat", '"kW" is a unit of a power, but an energy is needed'),
        ("61:9", "trains.t", '"equipment" is missing'),
        ("66:14", "trains.u.equipment.1", "There is no such piece of equipment"),
        ("67:1", "trains.u.processes", "The train holds equipment, whose totals are rates, and"),
        ("67:14", "trains.u.processes.1", "There is no such process"),
    ],
    "quantity-tables": [
        ("19:50", "states.1.pressure.sorce", 'A quantity has no "sorce"'),
        ("20:52", "states.1.temperature.distribution", "This distribution is not known"),
        ("20:52", "states.1.temperature.distribution", "The table gives distribution, but the value has no"),
        ("21:15", "states.1.mass_flow", "The table has no value"),
        ("25:59", "states.2.pressure.evaluation", "This evaluation is not known"),
        ("25:85", "states.2.pressure.degrees_of_freedom", "The degrees_of_freedom does not fit"),
    ],
    "revision-not-listed": [
        ("4:12", "calculation.revision", "This revision is not listed in [[revisions]]"),
        ("38:15", "revisions.2.index", "Revision A is already listed at line 33"),
    ],
    "second-source-faults": [
        (
            "16:19",
            "fluids.steam.reference_state",
            'This is not a value that "reference_state" can have',
            'Did you mean "NBP"?',
        ),
        ("17:21", "fluids.steam.second_source.modell", 'There is no key "modell" here', 'Did you mean "model"?'),
        ("23:18", "fluids.gas.second_source.1", "A second source is another model than that of the fluid itself"),
        (
            "23:37",
            "fluids.gas.second_source.2.model",
            'This is not a value that "model" can have',
            'Did you mean "library"?',
        ),
        ("23:59", "fluids.gas.second_source.2.tolerance", '"bar" is a unit of a pressure, but a ratio is needed'),
        ("23:70", "fluids.gas.second_source.3", 'A fluid with model = "cubic" cannot be checked by this second source'),
        (
            "31:33",
            "fluids.oil.second_source.model",
            'A fluid with model = "incompressible" cannot be checked by this second source',
        ),
        ("37:18", "states.1.second_source.1", 'This is not a value that "second_source" can have'),
        ("37:37", "states.1.second_source.3", "This second source is named twice"),
        ("43:64", "states.2.second_source.2.tolerance", "The value is outside what is possible"),
        ("43:79", "states.2.second_source.3.model", "This second source is named twice"),
        ("47:17", "states.3.second_source", "A second source is another model than that of the fluid itself"),
        ("51:17", "states.4.second_source", 'This is not a value that "second_source" can have'),
        ("55:17", "states.5.second_source", "The value does not fit"),
    ],
    "states-with-two-sources": [
        ("37:10", "equipment.PRV-4.inlet", "State 1 already enters PRV-3 at line 29"),
        ("38:10", "equipment.PRV-4.outlet", "State 2 already leaves PRV-3 at line 30"),
        ("43:10", "equipment.PRV-5.outlet", "The state both enters and leaves this piece"),
    ],
    "syntax-of-headers": [
        ("9:1", None, "The header is not closed by ]"),
        ("23:9", None, "The name of the table is not readable"),
        ("31:1", None, "The header is not closed by ]]"),
    ],
    "syntax-of-lines": [
        ("6:6", "calculation.owner", "A key must be followed by = and its value"),
        ("15:13", "fluids.steam.substance", "This is not a value"),
        ("19:15", "states.1.pressure", "The text is not closed by a quotation mark on its line"),
        ("21:1", "states.1.mass_flow", "A key must be followed by = and its value"),
        ("29:9", "equipment.PRV-3.inlet", "The value is missing"),
    ],
    "tables-and-values-confused": [
        ("14:9", "fluids.steam", "This is not the type of value that belongs here"),
        ("31:2", "revisions", "This is not the type of value that belongs here"),
        ("35:6", "references.R1", "This is not the type of value that belongs here"),
        ("37:18", "equipment.PRV-3.inlet", "inlet is a value (line 28) and cannot hold further keys"),
    ],
    "title-block-values": [
        ("2:12", "calculation.number", "This cannot be the name of a folder"),
        ("4:12", "calculation.revision", "This is not the type of value that belongs here"),
        ("6:12", "calculation.owner", "This is not the type of value that belongs here"),
        ("7:12", "calculation.status", 'This is not a value that "status" can have'),
        ("8:12", "calculation.units", 'This is not a value that "units" can have'),
        ("9:12", "calculation.client", "The text is empty"),
        ("10:1", "calculation.approved", 'There is no key "approved" here', 'Did you mean "approver"?'),
    ],
    "trains-that-do-not-fit": [
        ("38:10", "equipment.TG-1.inlet", "State 1 already enters PRV-3 at line 29"),
        ("41:12", "equipment.TG-2", "The piece belongs to no train"),
        ("55:22", "trains.turbine.equipment.2", "The piece already belongs to a train"),
        ("59:18", "trains.third.equipment", "The value does not fit"),
        ("60:18", "trains.third.alternative_to", "An alternative stands in the place of a train that is none"),
    ],
    "unclosed-list": [
        ("34:13", "trains.valve.equipment", "The list is not closed"),
        ("35:18", "trains.valve.alternative_to", "There is no such train"),
        ("38:11", "criteria.C1.value", 'No value can have this path. There is no "lost_wrk" among the'),
        ("39:11", "criteria.C1.at_most", "A table in braces must be closed on its line"),
    ],
    "unclosed-text": [
        ("5:11", None, "The text is not closed"),
    ],
    "units-of-another-quantity": [
        ("19:15", "states.1.pressure", '"degC" is a unit of a temperature, but a pressure is needed'),
        ("20:15", "states.1.temperature", '"bar(g)" is a unit of a pressure, but a temperature is needed'),
        ("21:15", "states.1.mass_flow", '"t" is a unit of a mass, but a mass flow is needed'),
        ("31:1", "equipment.PRV-3.isentropic_efficiency", 'There is no key "isentropic_efficiency" here'),
    ],
    "unknown-names": [
        ("24:12", "states.2.fluid", "There is no such fluid", 'Did you mean "steam"?'),
        ("30:10", "equipment.PRV-3.outlet", "There is no such state", 'Did you mean "2"?'),
        ("33:8", "states.3.like", "There is no such state", 'Did you mean "11a"?'),
        ("39:11", "criteria.C1.value", 'No value can have this path. There is no "PVR-3" in'),
        ("44:23", "trains.main.equipment.2", "There is no such piece of equipment"),
        ("48:19", "trains.other.equipment.1", "There is no such piece of equipment", 'Did you mean "PRV-3"?'),
        ("49:18", "trains.other.alternative_to", "There is no such train", 'Did you mean "main"?'),
    ],
    "unquoted-quantities": [
        ("19:15", "states.1.pressure", "This is not a value"),
        ("21:15", "states.1.mass_flow", "This is not a value"),
        ("25:12", "states.2.pressure", "The unit is missing"),
    ],
    "vessel-faults": [
        ("28:1", "states.1.mass", "State 1 belongs to vessel V-2, whose volume tells how much t"),
        ("36:10", "vessels.V-1.kind", 'This is not a value that "kind" can have', 'Did you mean "discharge"?'),
        ("39:10", "vessels.V-2.volume", '"volume" is missing'),
        ("39:10", "vessels.V-2.final_pressure", "Nothing says where the discharge ends"),
        ("42:1", "vessels.V-2.orifice.diameter", '"diameter" is missing'),
        ("42:1", "vessels.V-2.orifice", "The flow through the orifice needs the pressure behind it"),
        ("46:18", "vessels.V-3.initial", "There is no such state"),
        ("49:18", "vessels.V-3.outlet", 'This is not a value that "outlet" can have', 'Did you mean "vapour"?'),
        ("50:69", "vessels.V-3.wall.heat_transfer", "Heat passes from the wall at a finite rate, but nothing says"),
        ("50:69", "vessels.V-3.wall.heat_transfer", "The heat transfer coefficient needs the area that it holds f"),
        ("55:16", "vessels.V-4.supply", "An incompressible fluid keeps its density: its pressure does"),
        ("55:16", "vessels.V-4.supply", "What enters is of another fluid than the content"),
        ("56:16", "vessels.V-4.volume", '"kg" is a unit of a mass, but a volume is needed'),
        ("57:1", "vessels.V-4.supplyvolume", 'There is no key "supplyvolume" here', 'Did you mean "supply_volume"?'),
        ("59:10", "vessels.v-4", "The tag is already that of a vessel, at line 52, or differs "),
    ],
}


def test_every_malformed_file_is_in_the_table_and_there_are_at_least_thirty() -> None:
    assert {path.stem for path in FOLDER.glob("*.toml")} == EXPECTED.keys()
    assert len(EXPECTED) >= 30


@pytest.mark.parametrize("name", EXPECTED)
def test_all_faults_of_a_malformed_file_are_reported_at_their_places(name: str, tmp_path: Path) -> None:
    shutil.copyfile(FOLDER / f"{name}.toml", tmp_path / "calculation.toml")
    with pytest.raises(InputError) as caught:
        spec.read(tmp_path)
    faults = caught.value.faults
    assert caught.value.exit_status == 2
    found = [(f"{fault.line}:{fault.column}", fault.path) for fault in faults]
    assert found == [(place, path) for place, path, *_ in EXPECTED[name]], str(caught.value)
    for fault, (_, _, *words) in zip(faults, EXPECTED[name], strict=True):
        assert fault.file == "calculation.toml"
        for part in words:
            assert part is not None
            assert part in str(fault)
        assert fault.found or fault.expected or fault.hint, f"{fault} does not say what would do"
