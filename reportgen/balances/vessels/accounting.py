r"""Results of vessels: amounts and energies at both ends, entropy, its parts, the history, each with its step.

    ΔS = S_2 − S_1 ,   S_gen = ΔS − S_Q − S_m ,   S_gen = S_gen,vessel + S_gen,valve + S_gen,wall ,   lost work = T0 S_gen

The boundary holds the content, the film at the wall, and the valve; the metal is the reservoir with which the content
exchanges heat, S_Q = m_w c ln(T_w1/T_w2). S_m is the entropy of what enters, or, negative, of what leaves behind the
valve.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np
import numpy.typing as npt

from reportgen.balances.book import Book
from reportgen.balances.plant import Piece
from reportgen.balances.relations import Equation, Term, token
from reportgen.balances.solution import Account, Assumption, Entry, Solution, Step
from reportgen.balances.vessels.definitions import vessel_of
from reportgen.balances.vessels.following import BALANCED, TOLERANCE, Following, Vessel, follow
from reportgen.balances.vessels.paths import Ends, History, Integrals, ends, extreme, history, integrals
from reportgen.errors import Fault

__all__ = ["VesselPath", "add_vessel_results"]

Array = npt.NDArray[np.float64]

#: An integration is repeated with steps half as long: errors of a method of order 5 then fall by this factor.
_HALVED = 32.0
#: Results that the repetition is compared in.
_COMPARED = ("final_mass", "final_temperature", "minimum_temperature", "final_wall_temperature", "duration")
_BASIS = "mass and energy balance of a rigid volume"


@dataclass(frozen=True)
class VesselPath:
    """What a vessel has beside its values: its path in the base case and what is said about it.

    ``errors``: name of a result to what changed in it when the steps were halved [SI]. ``stopped``: why the path ends
    before its final pressure; empty where it does not.
    """

    history: History
    steps: int
    errors: Mapping[str, float]
    stopped: str
    charging: bool
    vessel: Vessel


def add_vessel_results(solution: Solution) -> None:
    """Follow every vessel and enter its results in a solution whose network is solved."""
    book = None
    for tag, piece in solution.vessels.items():
        book = book or _VesselBook(solution)
        solution.vessel_paths[tag] = book.vessel(piece)
    if book is not None and len(solution.vessels) > 1 and not solution.pieces and not solution.processes:
        book.total(solution.vessels)


@dataclass(frozen=True)
class _Found:
    """A path that was followed with all that follows from it."""

    following: Following
    ends: Ends
    integrals: Integrals
    lowest: tuple[Array, Array]
    highest: Array

    def result(self, name: str) -> Array:
        """One of the compared results, shape (N,)."""
        found = {
            "final_mass": self.ends.mass,
            "final_temperature": self.ends.temperature,
            "minimum_temperature": self.lowest[0],
            "final_wall_temperature": self.ends.wall_temperature,
            "duration": self.integrals.duration if self.following.vessel.flow_area is not None else np.array([np.nan]),
        }
        return found[name]


def _found(vessel: Vessel, columns: int, tolerance: float = TOLERANCE, refined: float = 1.0) -> _Found:
    following = follow(vessel, columns, tolerance, refined)
    at_end = ends(following)
    return _Found(
        following, at_end, integrals(following), extreme(following, at_end), extreme(following, at_end, lowest=False)[0]
    )


class _VesselBook(Book):
    """The results of vessels."""

    def vessel(self, piece: Piece) -> VesselPath:
        """All values, steps, assumptions and the account of one vessel."""
        vessel = vessel_of(piece, self.values, self.columns)
        found = _found(vessel, self.columns)
        first = _found(_base(vessel), 1, TOLERANCE / _HALVED, 0.5)
        errors = {
            name: float(abs(found.result(name)[0] - first.result(name)[0]))
            for name in _COMPARED
            if np.isfinite(found.result(name)[0])
        }
        stopped = _why_stopped(found.following)
        self._assume(piece, vessel)
        self._enter(piece, vessel, found, stopped)
        if stopped:
            self.solution.warnings.append(
                Fault(f"{piece.title}: {stopped}.", piece.path("final_temperature"), hint="See the history up to there.")
            )
        return VesselPath(
            history(found.following, found.ends),
            found.following.steps.of(0).size,
            errors,
            stopped,
            vessel.charging,
            vessel,
        )

    def _assume(self, piece: Piece, vessel: Vessel) -> None:
        """List what is taken for granted about a vessel."""

        def add(key: str, text: str, *affects: str, basis: str = "not stated in the file") -> None:
            paths = tuple(piece.path(name) for name in affects)
            self.solution.assumptions.append(Assumption(piece.path(key), text, piece.owner, paths, basis))

        title = piece.title
        if vessel.wall is None:
            add("adiabatic", f"{title}: no heat passes between the wall and the content.", "heat")
        else:
            text = f"{title}: no heat passes from the surroundings to the metal."
            add("insulated", text, "final_wall_temperature", "heat", basis="no heat to the outside is part of the kind")
            if vessel.wall.conductance is None:
                text = f"{title}: the metal has the temperature of the content at any time."
                add("wall_follows", text, "heat", "wall_entropy_generation")
            if piece.path("wall.initial_temperature") not in piece.given:
                whose = "the surroundings" if vessel.initial is None else "the content"
                text = f"{title}: in the beginning the metal has the temperature of {whose}."
                add("wall_begins", text, "final_wall_temperature", "heat")
        text = f"{title}: the content is of one pressure and temperature throughout, its phases in equilibrium."
        add("uniform", text, "final_temperature", basis="balance of one volume")
        if not vessel.charging:
            if piece.options.get("outlet") is None:
                text = f"{title}: what leaves is the content as it is, liquid and vapour in their proportion."
                add("homogeneous", text, "mass_transferred", "enthalpy_with_mass")
            if vessel.back_pressure is None:
                text = f"{title}: no back pressure is stated; the boundary is drawn before the valve."
                add("valve_outside", text, "valve_entropy_generation", "entropy_with_mass", "entropy_generation")
        if vessel.supply_volume is not None:
            text = f"{title}: the vessel that supplies is adiabatic, and what leaves it is its content as it is."
            add("supply_adiabatic", text, "supply_final_temperature", "entropy_with_mass")
        if vessel.flow_area is not None:
            text = (
                f"{title}: the flow to the throat of the orifice is isentropic and in equilibrium, two phases having "
                "one velocity; the discharge coefficient holds for all of it."
            )
            add("throat", text, "duration", basis="homogeneous equilibrium flow")
            if piece.path("orifice.discharge_coefficient") not in piece.given:
                add("discharge_coefficient", f"{title}: the discharge coefficient is 1.", "duration")
            if vessel.final_pressure is None:
                text = f"{title}: the pressures count as balanced when {BALANCED:g} of their first difference is left."
                add("balanced", text, "duration", basis="the flow comes to rest asymptotically")

    def _enter(self, piece: Piece, vessel: Vessel, found: _Found, stopped: str) -> None:
        """Values and steps in the order of the working."""
        path, title = piece.path, piece.title
        reached = found.following.steps.reached & _at_pressure(found.following)
        sums, at_end = found.integrals, found.ends
        fluid = f"fluids.{piece.fluid_id(piece.states('supply' if vessel.charging else 'initial')[0])}"
        given = [known for known in self.values if known.startswith(f"{piece.owner}.") and known in piece.given]
        begins = [f"states.{state}" for port in ("initial", "supply") for state in piece.states(port)]
        uses = (*given, *(f"{state}.{name}" for state in begins for name in ("density", "specific_enthalpy")), fluid)
        why = stopped or "the path does not reach its end"

        def put(
            name: str, result: Any, sentence: str, latex: str, sources: tuple[str, ...] = uses, reason: str = why,
            heading: str = "Path of the content", basis: str = _BASIS, at_any_end: bool = False,
        ) -> Array:
            step = Step(
                path(name), piece.owner, heading, f"{title}: {sentence}", basis, (path(name),), sources,
                (Equation(token(path(name)), latex),),
            )  # fmt: skip
            return self.put(step, result if at_any_end else np.where(reached, result, np.nan), reason)

        self._beginning(piece, vessel)
        sign = "+" if vessel.charging else "-"
        state = at_end.state
        pressure, entropy = (np.asarray(getattr(state, name)) for name in ("pressure", "specific_entropy"))
        put(
            "followed_pressure", pressure, "pressure to which the content could be followed.", r"p\left(\rho, u\right)",
            at_any_end=True,
        )  # fmt: skip
        put(
            "followed_temperature", at_end.temperature, "temperature there.", r"T\left(\rho, u\right)", at_any_end=True
        )
        arriving = r"\mathrm{s}" if vessel.charging else r"\mathrm{e}"
        put("final_mass", at_end.mass, "mass in the end, from the path.", rf"{token(path('initial_mass'))} {sign} \int \dot m\,\mathrm{{d}}t")
        terms = (Term(1.0, (path("final_mass"),)), Term(-1.0, (path("initial_mass"),)))
        if not vessel.charging:
            terms = (Term(1.0, (path("initial_mass"),)), Term(-1.0, (path("final_mass"),)))
        way = "entered" if vessel.charging else "left"
        self.balance(path("mass_transferred"), piece.owner, "Mass", f"{title}: mass that {way}.", _BASIS, terms)
        if path("final_pressure") not in self.values:
            put("final_pressure", pressure, "pressure in the end, in balance.", r"p\left(m_2/V, U_2/m_2\right)")
        put("final_temperature", at_end.temperature, "temperature in the end.", r"T\left(m_2/V, U_2/m_2\right)")
        put(
            "final_quality", state.quality, "vapour mass fraction in the end.", r"x\left(m_2/V, U_2/m_2\right)",
            reason=stopped or "the content is of one phase",
        )  # fmt: skip
        put("minimum_temperature", found.lowest[0], "lowest temperature of the content on the way.", r"\min T")
        put("maximum_temperature", found.highest, "highest temperature of the content on the way.", r"\max T")
        if vessel.wall is not None:
            put("final_wall_temperature", at_end.wall_temperature, "temperature of the metal in the end.", r"T_\mathrm{w}")
            put("minimum_wall_temperature", found.lowest[1], "lowest temperature of the metal.", r"\min T_\mathrm{w}")
        if at_end.supply is not None:
            for name, field, letter in (("pressure", "pressure", "p"), ("temperature", "temperature", "T")):
                put(f"supply_final_{name}", np.asarray(getattr(at_end.supply, field)),
                    f"{name} of the vessel that supplies, in the end.", rf"{letter}\left(\rho, u\right)")  # fmt: skip
        if vessel.flow_area is not None:
            lost = "the property model has no state in the throat of the orifice on a part of the way"
            put("duration", sums.duration, "time to the end.", r"\int \frac{\mathrm{d}m}{\dot m}", reason=stopped or lost)
            put(
                "maximum_mass_flow", sums.largest_flow, "largest flow through the orifice.",
                r"\max\, C_\mathrm{d} \frac{\pi}{4} d^{2} \max_{p} \rho \sqrt{2\left(h_0 - h\left(p, s_0\right)\right)}",
                reason=lost, basis="isentropic flow of the real fluid to the throat",
            )  # fmt: skip
        self._energy(piece, vessel, found, put, sign, arriving)
        self._entropy(piece, vessel, found, put, entropy)

    def _beginning(self, piece: Piece, vessel: Vessel) -> None:
        """Mass, energy and entropy in the beginning."""
        path, title, owner = piece.path, piece.title, piece.owner
        if vessel.initial is None:
            for name, words in (("mass", "mass"), ("energy", "internal energy"), ("entropy", "entropy")):
                step = Step(
                    path(f"initial_{name}"),
                    owner,
                    "Content in the beginning",
                    f"{title}: evacuated, it holds no {words}.",
                    "no initial state is given",
                    (path(f"initial_{name}"),),
                    (),
                    (Equation(token(path(f"initial_{name}")), "0"),),
                )
                self.put(step, 0.0)
            return
        state = piece.states("initial")[0]
        basis = "definition"
        terms = (Term(1.0, (path("volume"), f"states.{state}.density")),)
        sentence = f"{title}: mass in the beginning."
        self.balance(path("initial_mass"), owner, "Content in the beginning", sentence, basis, terms)
        for name, field in (("energy", "specific_internal_energy"), ("entropy", "specific_entropy")):
            terms = (Term(1.0, (path("initial_mass"), f"states.{state}.{field}")),)
            sentence = f"{title}: {'internal energy' if name == 'energy' else name} in the beginning."
            self.balance(path(f"initial_{name}"), owner, "Content in the beginning", sentence, basis, terms)

    def _energy(self, piece: Piece, vessel: Vessel, found: _Found, put: Any, sign: str, arriving: str) -> None:
        """Heat, work, enthalpy with mass, and what the integration leaves of mass and energy."""
        path, title, owner, sums = piece.path, piece.title, piece.owner, found.integrals
        direction = 1.0 if vessel.charging else -1.0
        wall = vessel.wall
        if wall is None:
            put("heat", 0.0 * found.ends.mass, "no heat.", "0", (f"assumptions.{path('adiabatic')}",))
        elif wall.conductance is None:
            text = "heat given by the metal as it cools."
            put("heat", wall.capacity * (wall.temperature - found.ends.wall_temperature), text,
                r"m_\mathrm{w} c \left(T_\mathrm{w,1} - T_\mathrm{w,2}\right)")  # fmt: skip
        else:
            put("heat", sums.heat, "heat from the wall.", r"\int \alpha A \left(T_\mathrm{w} - T\right) \mathrm{d}t")
        put("work", 0.0 * found.ends.mass, "the volume is rigid: no work is done.", "0", (path("volume"),))
        put("enthalpy_with_mass", direction * sums.enthalpy, "enthalpy carried by what enters or leaves.",
            rf"{sign} \int h_{{{arriving}}}\,\mathrm{{d}}m")  # fmt: skip
        state = found.ends.state
        put("final_energy", found.ends.mass * np.asarray(state.specific_internal_energy), "internal energy in the end.",
            r"m_2\, u\left(T_2, m_2/V\right)")  # fmt: skip
        self.balance(
            path("energy_imbalance"), owner, "Check of energy",
            f"{title}: what the integration leaves of the energy balance.", "first law, rigid volume",
            (Term(1.0, (path("initial_energy"),)), Term(1.0, (path("heat"),)), Term(1.0, (path("enthalpy_with_mass"),)),
             Term(-1.0, (path("final_energy"),))),
        )  # fmt: skip
        reached = np.isfinite(self.array(path("final_mass")))
        left = np.where(reached, direction * sums.mass - (found.ends.mass - self.array(path("initial_mass"))), np.nan)
        put("mass_imbalance", left, "what the integration leaves of the mass balance.",
            rf"{sign} \int \mathrm{{d}}m - \left(m_2 - m_1\right)", (path("initial_mass"), path("final_mass")),
            heading="Check of mass", basis="conservation of mass")  # fmt: skip

    def _entropy(self, piece: Piece, vessel: Vessel, found: _Found, put: Any, entropy: Array) -> None:
        """Entropy at both ends, with heat, with mass; generation by the balance and by its parts; lost work."""
        path, title, owner, sums = piece.path, piece.title, piece.owner, found.integrals
        put("final_entropy", found.ends.mass * entropy, "entropy in the end.", r"m_2\, s\left(T_2, m_2/V\right)",
            heading="Entropy of the content", basis="entropy is a property of the state")  # fmt: skip
        self.balance(
            path("entropy_change"), owner, "Change of entropy", f"{title}: entropy in the end less that in the beginning.",
            "entropy is a property of the state",
            (Term(1.0, (path("final_entropy"),)), Term(-1.0, (path("initial_entropy"),))),
        )  # fmt: skip
        wall = vessel.wall
        if wall is None:
            put("entropy_with_heat", 0.0 * found.ends.mass, "no heat, and no entropy with it.", "0", (path("heat"),))
        else:
            change = wall.capacity * np.log(wall.temperature / found.ends.wall_temperature)
            put("entropy_with_heat", change, "entropy that the metal gives with its heat.",
                r"m_\mathrm{w} c \ln\frac{T_\mathrm{w,1}}{T_\mathrm{w,2}}", basis="heat at the temperature of the metal",
                heading="Entropy with heat")  # fmt: skip
        behind = "the property model has no state behind the valve, at the back pressure and the enthalpy of what leaves"
        if vessel.charging:
            assert vessel.supply is not None
            if vessel.supply_volume is None:
                state = piece.states("supply")[0]
                self.balance(
                    path("entropy_with_mass"), owner, "Entropy with mass", f"{title}: entropy of what entered.",
                    "entropy is additive",
                    (Term(1.0, (path("mass_transferred"), f"states.{state}.specific_entropy")),),
                )  # fmt: skip
            else:
                last = found.ends.supply
                given_up = vessel.supply_volume * (
                    vessel.supply.density * vessel.supply.entropy - np.asarray(last.density) * np.asarray(last.specific_entropy)
                )  # fmt: skip
                put("entropy_with_mass", given_up, "entropy that the vessel that supplies has less in the end.",
                    r"S_\mathrm{sup,1} - S_\mathrm{sup,2}", heading="Entropy with mass", basis="entropy is additive")  # fmt: skip
        else:
            outside = vessel.back_pressure is None
            carried, place = (sums.entropy_at_outlet, "before") if outside else (sums.entropy_behind, "behind")
            latex = r"-\int s_\mathrm{e}\,\mathrm{d}m" if outside else r"-\int s\left(p_\mathrm{b}, h_\mathrm{e}\right)\mathrm{d}m"
            put("entropy_with_mass", -carried, f"entropy of what left, {place} the valve.", latex, reason=behind,
                heading="Entropy with mass", basis="entropy is additive")  # fmt: skip
        self.balance(
            path("entropy_generation"), owner, "Entropy balance",
            f"{title}: what the entropy changes by and came neither with heat nor with mass was generated.",
            "second law, open volume",
            (Term(1.0, (path("entropy_change"),)), Term(-1.0, (path("entropy_with_heat"),)),
             Term(-1.0, (path("entropy_with_mass"),))),
        )  # fmt: skip
        if vessel.charging:
            mixing = r"\int \left(\frac{h_\mathrm{s} - h}{T} - \left(s\left(p, h_\mathrm{s}\right) - s\right)\right) \mathrm{d}m"
            throttling = r"\int \left(s\left(p, h_\mathrm{s}\right) - s_\mathrm{s}\right) \mathrm{d}m"
        else:
            mixing = r"\int \left(\frac{h_\mathrm{e} - h}{T} - \left(s_\mathrm{e} - s\right)\right) \mathrm{d}m"
            throttling = r"\int \left(s\left(p_\mathrm{b}, h_\mathrm{e}\right) - s_\mathrm{e}\right) \mathrm{d}m"
        split = {"heading": "Parts of the entropy generation", "basis": "second law, part by part along the path"}
        put("vessel_entropy_generation", sums.vessel, "generated in the content.", mixing, **split)
        outside = not vessel.charging and vessel.back_pressure is None
        put("valve_entropy_generation", 0.0 * sums.vessel if outside else sums.valve,
            "the valve lies outside the boundary." if outside else "generated by throttling, velocity lost behind included.",
            "0" if outside else throttling, reason=behind, **split)  # fmt: skip
        put("wall_entropy_generation", sums.wall, "generated as heat passes between metal and content.",
            r"\int \left(\frac{1}{T} - \frac{1}{T_\mathrm{w}}\right) \mathrm{d}Q" if vessel.timed else "0", **split)  # fmt: skip
        parts = [path(f"{name}_entropy_generation") for name in ("vessel", "valve", "wall")]
        self.balance(
            path("closure"), owner, "Closure of entropy",
            f"{title}: the parts along the path less the balance of the whole, which rests on both ends alone.",
            "parts against the whole",
            (*(Term(1.0, (part,)) for part in parts), Term(-1.0, (path("entropy_generation"),))),
        )  # fmt: skip
        self.lost_work(owner, title)
        self._account(piece, parts)

    def _account(self, piece: Piece, parts: list[str]) -> None:
        """Entropy entering, generated and leaving."""
        entries = [self._entry("in", "Content in the beginning", piece.path("initial_entropy"))]
        for name, words in (("entropy_with_heat", "Heat from the metal"), ("entropy_with_mass", "Mass that entered")):
            amount = self.array(piece.path(name))[0]
            if amount > 0.0:
                entries.append(self._entry("in", words, piece.path(name)))
            elif amount < 0.0:
                words = "Heat to the metal" if name == "entropy_with_heat" else "Mass that left"
                entries.append(self._entry("out", words, piece.path(name), -1))
        places = ("content", "valve", "film at the wall")
        complete = bool(np.isfinite(self.array(piece.path("entropy_generation"))[0]))
        if complete:
            entries += [
                self._entry("generated", words, part)
                for part, words in zip(parts, places, strict=True)
                if self.array(part)[0] != 0.0
            ]
        entries.append(self._entry("out", "Content in the end", piece.path("final_entropy")))
        states = tuple(state for port in ("initial", "supply") for state in piece.states(port))
        title = f"{piece.title}"
        self.solution.accounts[piece.owner] = Account(piece.owner, title, tuple(entries), complete, states, ())

    def _entry(self, side: Any, label: str, path: str, sign: int = 1) -> Entry:
        return Entry(side, label, path, sign, sign * self.array(path))

    def total(self, vessels: Mapping[str, Piece]) -> None:
        """Sums over all vessels."""
        words = f"Whole: sum over {', '.join(vessels)}."
        for name, heading in (
            ("heat", "Heat"),
            ("entropy_change", "Change of entropy"),
            ("entropy_with_heat", "Entropy with heat"),
            ("entropy_generation", "Entropy generation of the parts"),
        ):
            terms = [Term(1.0, (piece.path(name),)) for piece in vessels.values()]
            self.balance(f"total.{name}", "total", heading, words, "sum of the parts", terms)
        self.lost_work("total", "Whole")
        self.solution.closed.add("total")


def _base(vessel: Vessel) -> Vessel:
    """The same vessel with its base case alone."""

    def cut(value: Any) -> Any:
        if isinstance(value, np.ndarray):
            return value[:1]
        if isinstance(value, tuple) and hasattr(value, "_fields"):
            return value
        if hasattr(value, "__dataclass_fields__") and value is not vessel.fluid:
            return type(value)(**{name: cut(getattr(value, name)) for name in value.__dataclass_fields__})
        return value

    cut_vessel: Vessel = cut(vessel)
    return cut_vessel


def _at_pressure(following: Following) -> npt.NDArray[np.bool_]:
    """Columns whose path ended at its final pressure or in balance, and not at the end of the property model."""
    cold = following.place <= following.lowest * (1.0 + 1e-9)
    supply = following.supply_temperature <= following.lowest * (1.0 + 1e-9)
    beyond = cold | (supply if following.vessel.supply_volume is not None else np.zeros_like(cold))
    with np.errstate(all="ignore"):
        end = np.abs(np.log(following.vessel.end_pressure / following.pressure)) < 1e-8
    result: npt.NDArray[np.bool_] = end | ~beyond
    return result


def _why_stopped(following: Following) -> str:
    """Why the base case ends before its final pressure; empty where it does not."""
    if following.steps.reached[0] and _at_pressure(following)[0]:
        return ""
    fluid = following.vessel.fluid
    triple = fluid.limits.triple_point
    if following.place[0] <= following.lowest * (1.0 + 1e-6):
        if triple is not None and following.lowest <= triple.temperature + 1.0:
            return f"not followed below the triple point of {fluid.title}, where solid forms"
        return f"not followed below the lowest temperature of the property model of {fluid.title}"
    return f"the property model of {fluid.title} has no state on the further way, or in the throat of the orifice"


