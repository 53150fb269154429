"""A heat pump with a condenser cooled by water, for tests of cycles and exchangers; evaluated once."""

from __future__ import annotations

import functools

from reportgen.record import Record
from tests.evaluation.calculations import HEAD, evaluated

HEAT_PUMP = (
    HEAD
    + """
[fluids.refrigerant]
model     = "real-fluid"
substance = "R134a"

[fluids.water]
model     = "real-fluid"
substance = "water"

[states.1]
fluid     = "refrigerant"
pressure  = "2.4 bar ± 1 %"
superheat = "5 K"

[states.2]
fluid = "refrigerant"

[states.3]
fluid      = "refrigerant"
pressure   = "15 bar"
subcooling = "4 K"

[states.4]
fluid = "refrigerant"

[states.11]
fluid       = "water"
pressure    = "3 bar"
temperature = "35 degC"
mass_flow   = "0.4 kg/s ± 2 %"

[states.12]
fluid       = "water"
temperature = "45 degC ± 0.2 K"

[equipment.K]
kind                  = "compressor"
inlet                 = "1"
outlet                = "2"
isentropic_efficiency = "72 %"
mechanical_efficiency = "90 %"

[equipment.C]
kind               = "heat-exchanger"
hot_inlet          = "2"
hot_outlet         = "3"
cold_inlet         = "11"
cold_outlet        = "12"
hot_pressure_drop  = "0.3 bar"
cold_pressure_drop = "0.2 bar"

[equipment.V]
kind   = "throttling-valve"
inlet  = "3"
outlet = "4"

[equipment.E]
kind                 = "heater"
inlet                = "4"
outlet               = "1"
boundary_temperature = "5 degC"
"""
)


@functools.cache
def heat_pump(train: str = "") -> Record:
    """Its record, with a train of all pieces where one is described; not to be changed."""
    return evaluated(HEAT_PUMP + train)
