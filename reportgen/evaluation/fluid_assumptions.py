"""What the choice of a property model assumes, tested by solving the plant again with a better one.

An ideal gas is held against the real fluid, a constant heat capacity against a variable one, a cubic equation of state
and an incompressible liquid against the published equation of their substance where it is carried.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping
from typing import TYPE_CHECKING, Any

import numpy as np
import numpy.typing as npt

from reportgen.balances.kinds import kinds
from reportgen.evaluation.assumptions import AutomaticAssumption
from reportgen.evaluation.evaluated import EvaluatedPlant
from reportgen.evaluation.models import fluid_name
from reportgen.evaluation.trials import Trial, untested

if TYPE_CHECKING:
    from reportgen.fluids.model import Fluid
    from reportgen.spec.calculation import FluidSpec

__all__ = ["fluid_assumptions"]

Array = npt.NDArray[np.float64]

#: Given on a state, these tie a calculation to the zero of one property model.
TIED_TO_A_ZERO = ("specific_enthalpy", "specific_entropy")

#: Distance of the compressibility factor from 1 from which an ideal gas deserves a remark: common practice.
COMPRESSIBILITY_REMARK = 0.02

CHOSEN = "property model chosen in the file"


def fluid_assumptions(
    trial: Trial,
    specifications: Mapping[str, FluidSpec],
    real_counterpart: Callable[[Fluid], Fluid | None],
    with_variable_heat_capacity: Callable[[FluidSpec], Fluid],
) -> list[AutomaticAssumption]:
    """Ideal gas and constant heat capacity, cubic equation, constant density: for every fluid that rests on one.

    Args:
        trial: the solved plant, which can be solved otherwise.
        specifications: fluid id to what the file says.
        real_counterpart: the real fluid of the same substance, None where none is carried.
        with_variable_heat_capacity: the same ideal gas with its variable heat capacity.
    """
    found = []
    for identifier, specification in specifications.items():
        if specification.model == "real-fluid":
            continue
        found.append(_model_assumption(trial, identifier, specification, real_counterpart))
        if specification.heat_capacity is not None:
            other = with_variable_heat_capacity(specification)
            found.append(_constant_heat_capacity(trial, identifier, specification.heat_capacity, other))
    return found


def _model_assumption(
    trial: Trial,
    identifier: str,
    specification: FluidSpec,
    real_counterpart: Callable[[Fluid], Fluid | None],
) -> AutomaticAssumption:
    """That the substance behaves as its model has it."""
    model = trial.plant.fluids[identifier]
    name = fluid_name(identifier, model.title)
    if specification.products_of is not None:
        return _products_assumption(trial, identifier, specification, model)
    counterpart = real_counterpart(model)
    test = None
    basis = CHOSEN
    remark = _remark(trial.plant, identifier, specification.model, counterpart)
    if counterpart is None:
        basis += (
            f"; no real fluid {'of this composition' if model.composition else 'of this name'} is carried to test it"
        )
    else:
        condition = f"With the equation of state of the real fluid{remark}"
        mixed = _mixed_by(trial.plant, identifier) if specification.model == "ideal-gas" else None
        if mixed is not None:
            test = untested(f"Not tested{remark}: process {mixed} mixes it with other gases, as ideal gases alone are.")
        elif model.composition and (burner := _burnt_in(trial.plant, identifier)) is not None:
            test = untested(
                f"Not tested{remark}: it takes part in the combustion of {burner}, where traces in it count."
            )
        else:
            test = _model_test(trial, identifier, counterpart, condition)
    return AutomaticAssumption(
        f"fluids.{identifier}.{specification.model}",
        f"Fluid {name} {_claim(specification)}.",
        basis,
        (f"fluids.{identifier}",),
        test,
        against_better=True,
    )


def _products_assumption(trial: Trial, identifier: str, specification: FluidSpec, model: Any) -> AutomaticAssumption:
    """That products burn completely, tested by their equilibrium; equilibrium itself has nothing to be held against."""
    test = None
    basis = "chemistry chosen in the file"
    if specification.chemistry == "complete":
        other = model.with_chemistry("equilibrium")
        test = trial.run("With chemical equilibrium of the products", fluids={identifier: other})
    else:
        basis += "; rates of reaction are not part of any model here"
    claim = f"Fluid {fluid_name(identifier, model.title)} {_claim(specification)}."
    return AutomaticAssumption(
        f"fluids.{identifier}.{specification.chemistry}-chemistry",
        claim,
        basis,
        (f"fluids.{identifier}",),
        test,
        against_better=True,
    )


def _mixed_by(plant: EvaluatedPlant, identifier: str) -> str | None:
    """The process that mixes a gas with others, or makes it by mixing; None when there is none."""
    for tag, process in plant.processes.items():
        if process.mixes and any(plant.state_fluids[state] == identifier for state in process.states):
            return tag
    return None


def _burnt_in(plant: EvaluatedPlant, identifier: str) -> str | None:
    """The combustor that a gas enters, where the elements of its mixture count; None when there is none."""
    for tag, connections in plant.connections.items():
        entering = {plant.state_fluids[connection.state] for connection in connections if connection.direction == "in"}
        if kinds()[plant.kinds[tag]].burns and identifier in entering:
            return tag
    return None


def _claim(specification: FluidSpec) -> str:
    """What a model says of its fluid."""
    match specification.model:
        case "cubic":
            return f"follows the cubic equation of state of {specification.equation}"
        case "incompressible":
            return f"is incompressible: its density is {specification.density:g} kg/m3 in every state"
    if specification.products_of is not None and specification.chemistry == "complete":
        return "is an ideal gas, burnt completely: no dissociation, no nitrogen oxides"
    if specification.products_of is not None:
        return "is an ideal gas at chemical equilibrium in every state, also while it cools"
    return "is an ideal gas"


def _constant_heat_capacity(trial: Trial, identifier: str, heat_capacity: float, other: Fluid) -> AutomaticAssumption:
    name = fluid_name(identifier, trial.plant.fluids[identifier].title)
    return AutomaticAssumption(
        f"fluids.{identifier}.constant-heat-capacity",
        f"Fluid {name} has the constant heat capacity {heat_capacity:g} J/(kg K).",
        "heat capacity given in the file",
        (f"fluids.{identifier}",),
        _model_test(trial, identifier, other, "With the heat capacity as a function of temperature"),
        against_better=True,
    )


def _model_test(trial: Trial, identifier: str, other: Any, condition: str) -> dict[str, Any] | None:
    plant = trial.plant
    if plant.fluids[identifier].entropy_zero_name != other.entropy_zero_name:
        tied = next(_tied_to_the_zero(plant, identifier), None)
        if tied is not None:
            return untested(f"Not tested: {tied} is given, and the other model has another zero.")
    return trial.run(condition, fluids={identifier: other})


def _tied_to_the_zero(plant: EvaluatedPlant, identifier: str) -> Iterator[str]:
    """Paths of given enthalpies and entropies of a fluid."""
    for path in plant.axis.givens:
        if (
            path.startswith("states.")
            and path.rsplit(".", 1)[-1] in TIED_TO_A_ZERO
            and plant.state_fluids.get(path.split(".")[1]) == identifier
        ):
            yield path


def _remark(plant: EvaluatedPlant, identifier: str, model: str, counterpart: Any) -> str:
    """In brackets what the better model says of the quantity that the simpler one settles; empty for a cubic one."""
    if counterpart is None or model not in ("ideal-gas", "incompressible"):
        return ""
    states = [state for state, fluid in plant.state_fluids.items() if fluid == identifier]
    pressure, temperature = (
        np.array([plant.samples(f"states.{state}.{name}")[0] for state in states])
        for name in ("pressure", "temperature")
    )
    state = counterpart.at(pressure=pressure, temperature=temperature, errors="mask")
    if model == "ideal-gas":
        return " " + _compressibility(np.asarray(state.compressibility_factor, dtype=float))
    return " " + _densities(np.asarray(state.density, dtype=float))


def _compressibility(factors: Array) -> str:
    """ "(|Z − 1| up to 0.004)", with a word where that is more than common practice lets pass."""
    distance = np.abs(factors - 1.0)
    if not np.any(np.isfinite(distance)):
        return "(its compressibility factor cannot be had at these states)"
    largest = float(np.nanmax(distance))
    more = (
        f", beyond the {COMPRESSIBILITY_REMARK:g} that common practice lets pass"
        if largest > COMPRESSIBILITY_REMARK
        else ""
    )
    return f"(|Z − 1| up to {largest:.2g}{more})"


def _densities(densities: Array) -> str:
    """ "(densities from 958 to 998 kg/m3)"."""
    if not np.any(np.isfinite(densities)):
        return "(its density cannot be had at these states)"
    return f"(densities from {float(np.nanmin(densities)):.4g} to {float(np.nanmax(densities)):.4g} kg/m3)"
