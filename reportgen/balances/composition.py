"""Fluids whose composition follows from mass flows: the gas of a combustor, known by the streams that enter it.

Such a model (``fluids.reacting.product_gas.ProductGas``) lists those streams in ``flows`` and gives the model of one
composition with ``of``. Whatever is computed from it takes the flows as further inputs.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import replace
from typing import Any

from reportgen.balances.relations import Formula, Inverse

__all__ = ["flow_paths", "for_composition", "is_made", "with_flows"]


def is_made(fluid: Any) -> bool:
    """Whether the composition of a fluid follows from flows."""
    return bool(getattr(fluid, "flows", ()))


def flow_paths(fluid: Any) -> tuple[str, ...]:
    """Paths of the mass flows that the composition of a fluid follows from; none for a fluid of fixed composition."""
    return tuple(f"states.{state}.mass_flow" for state in getattr(fluid, "flows", ()))


def with_flows(fluid: Any, values: Mapping[str, Any]) -> Any:
    """The model for the flows in ``values``, by path, arrays of one shape; the fluid itself if it has none."""
    return fluid.of({state: values[f"states.{state}.mass_flow"] for state in fluid.flows}) if is_made(fluid) else fluid


def for_composition(fluids: Sequence[Any], make: Callable[..., Formula]) -> Formula:
    """A formula that uses property models; the flows they follow from become further inputs of it.

    ``make`` takes the models, in the order of ``fluids``, and gives the formula for them.
    """
    formula = make(*fluids)
    flows = tuple(dict.fromkeys(path for fluid in fluids for path in flow_paths(fluid)))
    if not flows:
        return formula
    own = len(formula.inputs)
    added = tuple(path for path in flows if path not in formula.inputs)

    def made(known: Mapping[str, Any]) -> Formula:
        return make(*(with_flows(fluid, known) for fluid in fluids))

    def evaluate(*arrays: Any) -> Any:
        known = dict(zip((*formula.inputs, *added), arrays, strict=True))
        return made(known).evaluate(*arrays[:own])

    def turned(path: str) -> Callable[..., Any]:
        def inverse(*arrays: Any) -> Any:
            known = dict(zip((*formula.turned_inputs(path), *added), arrays, strict=True))
            return made(known).inverses[path].evaluate(*arrays[:own])

        return inverse

    solvable = formula.inputs if formula.solvable_inputs is None else formula.solvable_inputs
    return replace(
        formula,
        inputs=(*formula.inputs, *added),
        evaluate=evaluate,
        # a flow that the composition follows from cannot be found by an inverse that takes the composition as known
        inverses={
            path: Inverse(turned(path), inverse.latex, inverse.sentence)
            for path, inverse in formula.inverses.items()
            if path not in flows
        },
        solvable_inputs=tuple(path for path in solvable if path not in flows),
        slopes=None,
    )
