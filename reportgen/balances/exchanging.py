"""Results of a piece in which one stream gives heat to another: profile, pinch, effectiveness, parts of the entropy."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from typing import TYPE_CHECKING, Any

from reportgen.balances.composition import flow_paths, for_composition, with_flows
from reportgen.balances.merit import ratio_of
from reportgen.balances.plant import Piece
from reportgen.balances.relations import Formula, token

if TYPE_CHECKING:
    from reportgen.balances.profiles import Along

__all__ = ["COUNTERFLOW", "EXCHANGE_REPORTS", "PARALLEL", "Exchanging"]

COUNTERFLOW, PARALLEL = "counterflow", "parallel-flow"
EXCHANGE_REPORTS = (
    "pinch",
    "pinch_place",
    "mean_temperature_difference",
    "effectiveness",
    "entropy_by_temperature_difference",
    "entropy_by_pressure_drop",
    "bejan_number",
)
_SIDES = ("hot", "cold")
_RANGE = "a state along the way lies outside the range of its fluid's equation"


class Exchanging:
    """The two streams of a piece with ports ``hot_inlet``, ``hot_outlet``, ``cold_inlet``, ``cold_outlet``."""

    def __init__(self, piece: Piece) -> None:
        self.piece = piece
        self.parallel = piece.choice("arrangement") == PARALLEL
        states = [piece.one(f"{side}_{end}") for side in _SIDES for end in ("inlet", "outlet")]
        names = ("pressure", "specific_enthalpy")
        #: Pressure and enthalpy of the four states, then flow and pressure loss of both sides; last the flows below.
        self.inputs: tuple[str, ...] = (
            *(f"states.{state}.{name}" for state in states for name in names),
            *(f"states.{piece.one(f'{side}_inlet')}.mass_flow" for side in _SIDES),
            *(piece.path(f"{side}_pressure_drop") for side in _SIDES),
        )
        self.models = [piece.fluid(piece.one(f"{side}_inlet")) for side in _SIDES]
        #: Flows from which the composition of a stream follows, if it does.
        self.flows = tuple(dict.fromkeys(path for model in self.models for path in flow_paths(model)))
        self.inputs = (*self.inputs, *self.flows)
        self._last: tuple[tuple[Any, ...], Along] | None = None

    def along(self, *arrays: Any) -> Along:
        """The profile of the arrays of ``inputs``; the last one is kept, since several results share it."""
        from reportgen.balances.profiles import along

        if self._last is None or any(a is not b for a, b in zip(self._last[0], arrays, strict=True)):
            self._last = arrays, along(*self._streams(arrays))
        return self._last[1]

    def profile(self, values: Mapping[str, Any]) -> Along:
        """The profile of the base case; ``values`` by path, shape (N,)."""
        return self.along(*(values[path][:1] for path in self.inputs))

    def _streams(self, arrays: Sequence[Any]) -> Any:
        import numpy as np

        from reportgen.balances.profiles import Ends, Stream

        parts = [np.atleast_1d(np.asarray(array, float)) for array in np.broadcast_arrays(*arrays)]
        inlets = [(parts[0], parts[1]), (parts[4], parts[5])]
        outlets = [(parts[2], parts[3]), (parts[6], parts[7])]
        streams = []
        composition = dict(zip(self.flows, parts[12:], strict=True))
        for number, side in enumerate(_SIDES):
            backwards = side == "hot" and not self.parallel
            first, last = (outlets, inlets) if backwards else (inlets, outlets)
            fluid = with_flows(self.models[number], composition)
            streams.append(Stream(fluid, Ends(*first[number], *last[number]), parts[8 + number], parts[10 + number]))
        return streams

    # -- results ---------------------------------------------------------------------------------------------------

    def results(self) -> list[Formula]:
        """Pinch and its place, mean difference, effectiveness, both parts of the entropy generation, Bejan number."""
        way = "parallel flow" if self.parallel else "counterflow"
        return [
            self._of_profile(
                "pinch",
                "Pinch",
                f"the smallest difference of the temperatures of the two streams along the duty, in {way}.",
                lambda profile, *_: profile.pinch,
                r"\min_{y}\left(T_\mathrm{h}(y) - T_\mathrm{c}(y)\right)",
            ),
            self._of_profile(
                "pinch_place",
                "Place of the pinch",
                "where along the duty the temperatures come closest, counted from "
                + ("the inlets." if self.parallel else "the cold end."),
                lambda profile, *_: profile.place,
                rf"y\left({token(self.piece.path('pinch'))}\right)",
                (self.piece.path("pinch"),),
            ),
            self._of_profile(
                "mean_temperature_difference",
                "Mean temperature difference",
                "the difference that would pass the duty if it were the same everywhere.",
                lambda profile, *_: profile.mean,
                r"\left(\int_{0}^{1}\frac{\mathrm{d}y}{T_\mathrm{h} - T_\mathrm{c}}\right)^{-1}",
                reason="the temperatures cross or meet",
            ),
            self._effectiveness(),
            self._by_difference(),
            self._of_profile(
                "entropy_by_pressure_drop",
                "Entropy generation by pressure loss",
                "what the pressure losses of both streams generate.",
                lambda profile, *_: profile.friction,
                r"\sum \dot m\,\Delta p\int_{0}^{1}\frac{v}{T}\,\mathrm{d}y",
            ),
            self._bejan(),
        ]

    def _of_profile(
        self,
        name: str,
        heading: str,
        sentence: str,
        take: Callable[..., Any],
        latex: str,
        more: Sequence[str] = (),
        reason: str = _RANGE,
    ) -> Formula:
        """A value taken from the profile and, after it, the arrays of the paths ``more``."""
        piece, count = self.piece, len(self.inputs)
        fluids = dict.fromkeys(piece.fluid_id(piece.one(f"{side}_inlet")) for side in _SIDES)
        return Formula(
            piece.path(name),
            piece.owner,
            heading,
            f"{piece.title}: {sentence}",
            "states along the duty, enthalpy and pressure changing evenly with it",
            piece.path(name),
            (*self.inputs, *more),
            lambda *arrays: take(self.along(*arrays[:count]), *arrays[count:]),
            latex,
            fluids=tuple(fluids),
            reason=reason,
        )

    def _by_difference(self) -> Formula:
        piece = self.piece
        more = tuple(piece.path(name) for name in ("duty", "heat", "entropy_with_heat"))
        duty, heat, entropy = (token(path) for path in more)
        return self._of_profile(
            "entropy_by_temperature_difference",
            "Entropy generation by heat across temperature differences",
            "what the duty generates on its way from the hot to the cold stream, and the heat from outside between the "
            "boundary and the cold stream.",
            lambda profile, exchanged, brought, carried: (
                exchanged * profile.across + brought * profile.cold_inverse - carried
            ),
            rf"{duty}\int_{{0}}^{{1}}\left(\frac{{1}}{{T_\mathrm{{c}}}} - \frac{{1}}{{T_\mathrm{{h}}}}\right)"
            rf"\mathrm{{d}}y + {heat}\int_{{0}}^{{1}}\frac{{\mathrm{{d}}y}}{{T_\mathrm{{c}}}} - {entropy}",
            more,
        )

    def _effectiveness(self) -> Formula:
        return for_composition(self.models, self._effectiveness_of)

    def _effectiveness_of(self, hot_model: Any, cold_model: Any) -> Formula:
        piece = self.piece
        inlets = [piece.one(f"{side}_inlet") for side in _SIDES]
        outlets = [piece.one(f"{side}_outlet") for side in _SIDES]
        inputs = (
            piece.path("duty"),
            *(f"states.{state}.{name}" for state in inlets for name in ("mass_flow", "specific_enthalpy")),
            *(f"states.{state}.pressure" for state in outlets),
            *(f"states.{state}.temperature" for state in inlets),
        )
        duty, m1, h1, m2, h2, p1, p2, t1, t2 = (token(path) for path in inputs)

        def evaluate(exchanged: Any, *arrays: Any) -> Any:
            import numpy as np

            hot_flow, hot_in, cold_flow, cold_in, hot_p, cold_p, hot_t, cold_t = arrays
            coldest = hot_model.at(pressure=hot_p, temperature=cold_t, errors="mask").specific_enthalpy
            hottest = cold_model.at(pressure=cold_p, temperature=hot_t, errors="mask").specific_enthalpy
            most = np.fmin(hot_flow * (hot_in - coldest), cold_flow * (hottest - cold_in))
            return ratio_of(exchanged, most)

        hot = rf"{m1}\left({h1} - h\left({p1},\,{t2}\right)\right)"
        cold = rf"{m2}\left(h\left({p2},\,{t1}\right) - {h2}\right)"
        path = piece.path("effectiveness")
        return Formula(
            path,
            piece.owner,
            "Effectiveness",
            f"{piece.title}: the duty in parts of what either stream could exchange up to the inlet temperature of the "
            "other.",
            "definition of effectiveness",
            path,
            inputs,
            evaluate,
            # in one line, since a fraction over so long a choice could not be broken
            rf"{duty}/\min\left({hot},\,{cold}\right)",
            fluids=tuple(dict.fromkeys(piece.fluid_id(state) for state in inlets)),
            reason="neither stream has a state at the inlet temperature of the other, or there is nothing to exchange",
        )

    def _bejan(self) -> Formula:
        piece = self.piece
        inputs = tuple(piece.path(f"entropy_by_{part}") for part in ("temperature_difference", "pressure_drop"))
        across, friction = (token(path) for path in inputs)
        path = piece.path("bejan_number")
        return Formula(
            path,
            piece.owner,
            "Bejan number",
            f"{piece.title}: the share of heat across temperature differences in the entropy generation.",
            "definition of the Bejan number",
            path,
            inputs,
            lambda by_heat, by_loss: ratio_of(by_heat, by_heat + by_loss),
            rf"\frac{{{across}}}{{{across} + {friction}}}",
            reason="nothing generates entropy",
        )
