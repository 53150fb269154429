r"""Results of one vessel that was followed, each with its step of the working, and its entropy account.

    ΔS = S_2 − S_1 ,   S_gen = ΔS − S_Q − S_m = S_gen,vessel + S_gen,valve + S_gen,wall ,   lost work = T0 S_gen

The boundary holds the content, the film at the wall, and the valve; the metal is the reservoir with which the content
exchanges heat, S_Q = m_w c ln(T_w1/T_w2). S_m is the entropy of what enters, or, negative, of what leaves behind the
valve.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
import numpy.typing as npt

from reportgen.balances.book import Book
from reportgen.balances.plant import Piece
from reportgen.balances.relations import Equation, Term, token
from reportgen.balances.solution import Account, Entry, Solution, Step
from reportgen.balances.vessels.following import Following
from reportgen.balances.vessels.paths import Ends, Integrals

__all__ = ["FollowedVessel", "enter_results"]

Array = npt.NDArray[np.float64]

#: Part of the entropies of the content below which a part of the generation is rounding.
_ROUNDING = 1e-12
_BASIS = "mass and energy balance of a rigid volume"
_ADDITIVE = "entropy is additive"
_NOTHING_BEHIND = (
    "the property model has no state behind the valve, at the back pressure and the enthalpy of what leaves"
)
_NO_THROAT = "the property model has no state in the throat of the orifice on a part of the way"

#: Right sides in LaTeX: of charging, then of discharge, where the two differ.
_ENTHALPY = (r"\int h_\mathrm{s}\,\mathrm{d}m", r"-\int h_\mathrm{e}\,\mathrm{d}m")
_MIXING = (
    r"\int \left[\frac{h_\mathrm{s} - h}{T} - s\left(p, h_\mathrm{s}\right) + s\right] \mathrm{d}m",
    r"\int \left[\frac{h_\mathrm{e} - h}{T} - s_\mathrm{e} + s\right] \mathrm{d}m",
)
_THROTTLING = (
    r"\int \left[s\left(p, h_\mathrm{s}\right) - s_\mathrm{s}\right] \mathrm{d}m",
    r"\int \left[s\left(p_\mathrm{b}, h_\mathrm{e}\right) - s_\mathrm{e}\right] \mathrm{d}m",
)
_FLUX = (
    r"\max_{t} C_\mathrm{d} \frac{\pi}{4} d_\mathrm{o}^{2} "
    r"\max_{p} \rho \sqrt{2\left[h_0 - h\left(p, s_0\right)\right]}"
)
_HEAT = r"\int \alpha A \left(T_\mathrm{w} - T\right) \mathrm{d}t"
_HEAT_OF_METAL = r"m_\mathrm{w} c \left(T_\mathrm{w,1} - T_\mathrm{w,2}\right)"
_ENTROPY_OF_METAL = r"m_\mathrm{w} c \ln\frac{T_\mathrm{w,1}}{T_\mathrm{w,2}}"
_ACROSS_FILM = r"\int \left[\frac{1}{T} - \frac{1}{T_\mathrm{w}}\right] \mathrm{d}Q"


@dataclass(frozen=True)
class FollowedVessel:
    """A path that was followed with all that follows from it."""

    following: Following
    ends: Ends
    integrals: Integrals
    lowest: tuple[Array, Array]
    highest: Array

    def result(self, name: str) -> Array:
        """One of the results by which two integrations are compared, shape (N,)."""
        found = {
            "final_mass": self.ends.mass,
            "final_temperature": self.ends.temperature,
            "minimum_temperature": self.lowest[0],
            "final_wall_temperature": self.ends.wall_temperature,
            "duration": self.integrals.duration if self.following.vessel.flow_area is not None else np.array([np.nan]),
        }
        return found[name]


def enter_results(solution: Solution, piece: Piece, found: FollowedVessel, stopped: str) -> None:
    """Enter values, steps and account of one vessel; ``stopped`` says why the base case does not reach its end."""
    book = _VesselBook(solution, piece, found, stopped)
    book.beginning()
    book.path_of_the_content()
    book.energy()
    book.entropy()
    book.parts()
    book.account()


class _VesselBook(Book):
    """The results of one vessel."""

    def __init__(self, solution: Solution, piece: Piece, found: FollowedVessel, stopped: str) -> None:
        super().__init__(solution)
        self.piece, self.found, self.stopped = piece, found, stopped
        self.vessel = found.following.vessel
        self.complete = found.following.complete
        self.path = piece.path
        #: What the results of a path rest on: the chain leads on from there to all that was given.
        self.followed = (self.path("followed_pressure"), self.path("followed_temperature"))
        self.side = 0 if self.vessel.charging else 1

    def tell(
        self,
        name: str,
        result: Any,
        sentence: str,
        latex: str,
        *,
        heading: str = "Path of the content",
        basis: str = _BASIS,
        uses: Sequence[str] | None = None,
        reason: str = "",
        at_any_end: bool = False,
    ) -> None:
        """Enter one value; columns that do not reach their end have none, unless ``at_any_end``."""
        step = Step(
            self.path(name),
            self.piece.owner,
            heading,
            f"{self.piece.title}: {sentence}",
            basis,
            (self.path(name),),
            tuple(self.followed if uses is None else uses),
            (Equation(token(self.path(name)), latex),),
        )
        known = np.asarray(result, dtype=float)
        result = known if at_any_end else np.where(self.complete, known, np.nan)
        self.put(step, result, self.stopped or reason or "the path does not reach its end")

    def add_up(self, name: str, heading: str, sentence: str, basis: str, *terms: tuple[float, str]) -> None:
        """Enter a sum of values of the vessel itself."""
        summed = [Term(sign, (self.path(part),)) for sign, part in terms]
        self.balance(self.path(name), self.piece.owner, heading, f"{self.piece.title}: {sentence}", basis, summed)

    def beginning(self) -> None:
        """Mass, energy and entropy in the beginning."""
        heading, title = "Content in the beginning", self.piece.title
        words = {"mass": "mass", "energy": "internal energy", "entropy": "entropy"}
        if self.vessel.initial is None:
            for name, word in words.items():
                sentence = f"evacuated, it holds no {word}."
                basis = "no initial state is given"
                self.tell(f"initial_{name}", 0.0, sentence, "0", heading=heading, basis=basis, uses=(), at_any_end=True)
            return
        state = self.piece.states("initial")[0]
        products = {
            "mass": (self.path("volume"), f"states.{state}.density"),
            "energy": (self.path("initial_mass"), f"states.{state}.specific_internal_energy"),
            "entropy": (self.path("initial_mass"), f"states.{state}.specific_entropy"),
        }
        for name, factors in products.items():
            sentence = f"{title}: {words[name]} in the beginning."
            owner, terms = self.piece.owner, [Term(1.0, factors)]
            self.balance(self.path(f"initial_{name}"), owner, heading, sentence, "definition", terms)

    def path_of_the_content(self) -> None:
        """Where the path ends, and the extremes on the way."""
        found, end, vessel = self.found, self.found.ends, self.vessel
        pressure = np.asarray(end.state.pressure)
        sentence = "pressure to which the content was followed."
        self.tell(
            "followed_pressure", pressure, sentence, r"p\left(\rho, u\right)", uses=self._given(), at_any_end=True
        )
        first = self.followed[:1]
        sentence = "temperature there."
        latex = r"T\left(\rho, u\right)"
        self.tell("followed_temperature", end.temperature, sentence, latex, uses=first, at_any_end=True)
        mass = (r"+ \int \dot m\,\mathrm{d}t", r"- \int \dot m\,\mathrm{d}t")[self.side]
        self.tell("final_mass", end.mass, "mass in the end.", f"{token(self.path('initial_mass'))} {mass}")
        signs = ((1.0, -1.0), (-1.0, 1.0))[self.side]
        way = ("entered", "left")[self.side]
        terms = zip(signs, ("final_mass", "initial_mass"), strict=True)
        self.add_up("mass_transferred", "Mass", f"mass that {way}.", _BASIS, *sorted(terms, reverse=True))
        if self.path("final_pressure") not in self.values:
            self.tell("final_pressure", pressure, "pressure in the end, in balance.", r"p\left(m_2/V, U_2/m_2\right)")
        latex = r"T\left(m_2/V, U_2/m_2\right)"
        self.tell("final_temperature", end.temperature, "temperature in the end.", latex)
        latex = r"x\left(m_2/V, U_2/m_2\right)"
        one = "the content is of one phase"
        self.tell("final_quality", end.state.quality, "vapour mass fraction in the end.", latex, reason=one)
        self.tell("minimum_temperature", found.lowest[0], "lowest temperature on the way.", r"\min T")
        self.tell("maximum_temperature", found.highest, "highest temperature on the way.", r"\max T")
        if vessel.wall is not None:
            sentence = "temperature of the metal in the end."
            self.tell("final_wall_temperature", end.wall_temperature, sentence, r"T_\mathrm{w}")
            sentence = "lowest temperature of the metal on the way."
            self.tell("minimum_wall_temperature", found.lowest[1], sentence, r"\min T_\mathrm{w}")
        if end.supply is not None:
            for name, letter in (("pressure", "p"), ("temperature", "T")):
                sentence = f"{name} of the vessel that supplies, in the end."
                value = np.asarray(getattr(end.supply, name))
                self.tell(f"supply_final_{name}", value, sentence, rf"{letter}\left(\rho, u\right)")
        if vessel.flow_area is not None:
            latex = r"\int \frac{\mathrm{d}m}{\dot m}"
            self.tell("duration", found.integrals.duration, "time to the end.", latex, reason=_NO_THROAT)
            sentence, basis = "largest flow through the orifice.", "isentropic flow of the real fluid to the throat"
            flow = found.integrals.largest_flow
            self.tell("maximum_mass_flow", flow, sentence, _FLUX, basis=basis, reason=_NO_THROAT)

    def _given(self) -> list[str]:
        """All that a path rests on."""
        begins = [state for port in ("initial", "supply") for state in self.piece.states(port)]
        given = [
            known for known in self.values if known.startswith(f"{self.piece.owner}.") and known in self.piece.given
        ]
        of_states = [f"states.{state}.{name}" for state in begins for name in ("density", "specific_enthalpy")]
        return [*given, *of_states, f"fluids.{self.piece.fluid_id(begins[0])}"]

    def energy(self) -> None:
        """Heat, work, enthalpy with mass, and what the integration leaves of mass and energy."""
        end, sums, wall = self.found.ends, self.found.integrals, self.vessel.wall
        direction = (1.0, -1.0)[self.side]
        none = np.zeros_like(end.mass)
        if wall is None:
            self.tell("heat", none, "no heat.", "0", uses=(f"assumptions.{self.path('adiabatic')}",))
        elif wall.conductance is None:
            heat = wall.capacity * (wall.temperature - end.wall_temperature)
            self.tell("heat", heat, "heat given by the metal as it cools.", _HEAT_OF_METAL)
        else:
            self.tell("heat", sums.heat, "heat from the wall.", _HEAT)
        volume = (self.path("volume"),)
        self.tell("work", none, "the volume is rigid: no work is done.", "0", uses=volume)
        sentence = f"enthalpy carried by what {('enters', 'leaves')[self.side]}."
        self.tell("enthalpy_with_mass", direction * sums.enthalpy, sentence, _ENTHALPY[self.side])
        energy = end.mass * np.asarray(end.state.specific_internal_energy)
        self.tell("final_energy", energy, "internal energy in the end.", r"m_2\, u\left(T_2, m_2/V\right)")
        sentence = "what the integration leaves of the energy balance."
        signs = ((1.0, "initial_energy"), (1.0, "heat"), (1.0, "enthalpy_with_mass"), (-1.0, "final_energy"))
        self.add_up("energy_imbalance", "Check of energy", sentence, "first law, rigid volume", *signs)
        left = direction * sums.mass - (end.mass - self.array(self.path("initial_mass")))
        self.tell(
            "mass_imbalance",
            left,
            "what the integration leaves of the mass balance.",
            (r"\int \mathrm{d}m - \left(m_2 - m_1\right)", r"\left(m_1 - m_2\right) - \int \mathrm{d}m")[self.side],
            heading="Check of mass",
            basis="conservation of mass",
            uses=(self.path("initial_mass"), self.path("final_mass")),
        )

    def entropy(self) -> None:
        """Entropy at both ends, with heat, with mass; generation by the balance; lost work."""
        end, sums, vessel = self.found.ends, self.found.integrals, self.vessel
        basis = "entropy is a property of the state"
        value = end.mass * np.asarray(end.state.specific_entropy)
        latex = r"m_2\, s\left(T_2, m_2/V\right)"
        self.tell("final_entropy", value, "entropy in the end.", latex, heading="Entropy of the content", basis=basis)
        signs = ((1.0, "final_entropy"), (-1.0, "initial_entropy"))
        sentence = "entropy in the end less that in the beginning."
        self.add_up("entropy_change", "Change of entropy", sentence, basis, *signs)
        heading = "Entropy with heat"
        if vessel.wall is None:
            uses = (self.path("heat"),)
            sentence = "no heat, and no entropy with it."
            self.tell("entropy_with_heat", np.zeros_like(end.mass), sentence, "0", heading=heading, uses=uses)
        else:
            change = vessel.wall.capacity * np.log(vessel.wall.temperature / end.wall_temperature)
            sentence, basis = "entropy that the metal gives with its heat.", "heat at the temperature of the metal"
            self.tell("entropy_with_heat", change, sentence, _ENTROPY_OF_METAL, heading=heading, basis=basis)
        heading = "Entropy with mass"
        if vessel.supply is not None and vessel.supply_volume is None:
            factors = (self.path("mass_transferred"), f"states.{self.piece.states('supply')[0]}.specific_entropy")
            sentence, owner = f"{self.piece.title}: entropy of what entered.", self.piece.owner
            terms = [Term(1.0, factors)]
            self.balance(self.path("entropy_with_mass"), owner, heading, sentence, _ADDITIVE, terms)
        elif vessel.supply is not None and vessel.supply_volume is not None:
            last = np.asarray(end.supply.density) * np.asarray(end.supply.specific_entropy)
            given_up = vessel.supply_volume * (vessel.supply.density * vessel.supply.entropy - last)
            sentence = "entropy that the vessel that supplies has less in the end."
            latex = r"S_\mathrm{sup,1} - S_\mathrm{sup,2}"
            self.tell("entropy_with_mass", given_up, sentence, latex, heading=heading, basis=_ADDITIVE)
        elif vessel.back_pressure is None:
            carried, latex = -sums.entropy_at_outlet, r"-\int s_\mathrm{e}\,\mathrm{d}m"
            sentence = "entropy of what left, before the valve."
            self.tell("entropy_with_mass", carried, sentence, latex, heading=heading, basis=_ADDITIVE)
        else:
            carried, latex = -sums.entropy_behind, r"-\int s\left(p_\mathrm{b}, h_\mathrm{e}\right) \mathrm{d}m"
            sentence, reason = "entropy of what left, behind the valve.", _NOTHING_BEHIND
            self.tell("entropy_with_mass", carried, sentence, latex, heading=heading, basis=_ADDITIVE, reason=reason)
        sentence = "what the entropy changes by and came neither with heat nor with mass was generated."
        balance = ((1.0, "entropy_change"), (-1.0, "entropy_with_heat"), (-1.0, "entropy_with_mass"))
        self.add_up("entropy_generation", "Entropy balance", sentence, "second law, open volume", *balance)
        self.lost_work(self.piece.owner, self.piece.title)

    def parts(self) -> None:
        """Entropy generated in content, valve and film, along the path, and what they and the balance differ by."""
        sums, vessel = self.found.integrals, self.vessel
        heading, basis = "Parts of the entropy generation", "second law, part by part along the path"
        size = sum(np.abs(self.array(self.path(f"{end}_entropy"))) for end in ("initial", "final"))
        made = np.where(np.abs(sums.vessel) <= _ROUNDING * size, 0.0, sums.vessel)
        name = "vessel_entropy_generation"
        self.tell(name, made, "generated in the content.", _MIXING[self.side], heading=heading, basis=basis)
        name = "valve_entropy_generation"
        if not vessel.charging and vessel.back_pressure is None:
            sentence = "the valve lies outside the boundary."
            self.tell(name, np.zeros_like(made), sentence, "0", heading=heading, basis=basis)
        else:
            sentence, latex = "generated by throttling, the velocity lost behind it included.", _THROTTLING[self.side]
            self.tell(name, sums.valve, sentence, latex, heading=heading, basis=basis, reason=_NOTHING_BEHIND)
        latex = _ACROSS_FILM if vessel.timed else "0"
        sentence = "generated as heat passes between metal and content."
        self.tell("wall_entropy_generation", sums.wall, sentence, latex, heading=heading, basis=basis)
        sentence = "the parts along the path less the balance of the whole, which rests on both ends alone."
        signs = [(1.0, f"{part}_entropy_generation") for part in ("vessel", "valve", "wall")]
        signs.append((-1.0, "entropy_generation"))
        self.add_up("closure", "Closure of entropy", sentence, "parts against the whole", *signs)

    def account(self) -> None:
        """Entropy entering, generated and leaving; none where the path does not reach its end."""
        if not np.isfinite(self.array(self.path("final_entropy"))[0]):
            return
        entries = [self._entry("in", "Content in the beginning", "initial_entropy")]
        heat = self.array(self.path("entropy_with_heat"))[0]
        if heat > 0.0:
            entries.append(self._entry("in", "Heat from the metal", "entropy_with_heat"))
        elif heat < 0.0:
            entries.append(self._entry("out", "Heat to the metal", "entropy_with_heat", -1))
        complete = bool(np.isfinite(self.array(self.path("entropy_generation"))[0]))
        if complete:
            side, label, sign = (("in", "Mass that entered", 1), ("out", "Mass that left", -1))[self.side]
            entries.append(self._entry(side, label, "entropy_with_mass", sign))
            for part, place in (("vessel", "content"), ("valve", "valve"), ("wall", "film at the wall")):
                if self.array(self.path(f"{part}_entropy_generation"))[0] != 0.0:
                    entries.append(self._entry("generated", place, f"{part}_entropy_generation"))
        entries.append(self._entry("out", "Content in the end", "final_entropy"))
        states = tuple(state for port in ("initial", "supply") for state in self.piece.states(port))
        account = Account(self.piece.owner, self.piece.title, tuple(entries), complete, states, ())
        self.solution.accounts[self.piece.owner] = account

    def _entry(self, side: Any, label: str, name: str, sign: int = 1) -> Entry:
        return Entry(side, label, self.path(name), sign, sign * self.array(self.path(name)))
