r"""Gases that become one another's mixture when the partition between them is taken away.

    ΔS_mix = −Σ_i m_i R_i Σ_k x_ik ln(x_k/x_ik)

with R_i the specific gas constant of gas i, x_ik the mole fraction of species k in it and x_k that in the mixture.
Gases of one composition have none. The calculation file names the mixture as a fluid of its own; here its composition
follows from the masses, element by element of the sample axis, and what the file states of it is held against that.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from reportgen.balances.composition import flow_paths, with_flows
from reportgen.balances.plant import Piece, Plant
from reportgen.balances.relations import Formula, token
from reportgen.balances.zeros import same_zero
from reportgen.errors import Fault, InputError

__all__ = ["Blend", "Mixtures", "is_mixing", "mixing_faults", "mixing_results"]

#: Largest difference of a stated mole fraction from the one that follows from the masses: three decimal places.
STATED_WITHIN = 1e-3


@dataclass(frozen=True)
class Blend:
    """A fluid that a process makes: the process by its title and owner, and each gas with the path of its mass."""

    title: str
    owner: str
    fluid: str
    gases: tuple[tuple[str, str], ...]

    def share(self, species: str) -> str:
        """Path of a mole fraction of the mixture."""
        return f"{self.owner}.species.{species}.mole_fraction"


class Mixtures:
    """The fluids whose composition follows from masses."""

    def __init__(self, plant: Plant, processes: Mapping[str, Piece]) -> None:
        """Raise InputError where two processes make one fluid, or one makes a fluid from itself."""
        self._plant = plant
        self.blends: dict[str, Blend] = {}
        faults = []
        for piece in processes.values():
            if not piece.kind.mixes(piece):
                continue
            end, starts = piece.one("to"), piece.states("from")
            name = piece.fluid_id(end)
            place, expected = f"states.{end}.fluid", "a fluid of its own for each mixture"
            if name in self.blends:
                text = f"Fluid {name} is already made by {self.blends[name].title}: two mixtures have two compositions."
                faults.append(Fault(text, place, found=name, expected=expected))
            elif any(piece.fluid_id(state) == name for state in starts):
                text = f"{piece.title} mixes fluid {name} with others; what comes of it has another composition."
                faults.append(Fault(text, place, found=name, expected=expected))
            else:
                gases = tuple((piece.fluid_id(state), f"states.{state}.mass") for state in starts)
                self.blends[name] = Blend(piece.title, piece.owner, name, gases)
        if faults:
            raise InputError(faults)

    def masses(self, fluid: str) -> tuple[str, ...]:
        """Paths of the masses or mass flows that the composition of a fluid follows from; none for any other."""
        if fluid not in self.blends:
            return flow_paths(self._plant.fluids[fluid])
        gases = self.blends[fluid].gases
        inner = [path for gas, _ in gases for path in self.masses(gas)]
        return tuple(dict.fromkeys([*(path for _, path in gases), *inner]))

    def model(self, fluid: str, values: Mapping[str, Any]) -> Any:
        """Property model of a fluid; of a mixture with a composition for each element of its masses in ``values``."""
        stated = self._plant.fluids[fluid]
        if fluid not in self.blends:
            return with_flows(stated, values)
        from reportgen.fluids.gases.blend import GasBlend

        gases = self.blends[fluid].gases
        return GasBlend(stated, [self.model(gas, values) for gas, _ in gases], [values[path] for _, path in gases])

    def refuse_other_compositions(self, values: Mapping[str, Any]) -> None:
        """InputError where the file states a composition that does not follow from the masses, base case."""
        faults = []
        for name, blend in self.blends.items():
            base = {path: values[path][:1] for path in self.masses(name)}
            actual = {key: float(share[0]) for key, share in shares(self.model(name, base)).items()}
            stated = shares(self._plant.fluids[name])
            worst = max(actual, key=lambda key: abs(actual[key] - stated[key]))
            if not abs(actual[worst] - stated[worst]) <= STATED_WITHIN:
                faults.append(
                    Fault(
                        f"{blend.title} makes a mixture with {actual[worst]:.4g} mol of {worst} in 1 mol, but fluid "
                        f"{name} is stated with {stated[worst]:.4g}.",
                        f"fluids.{name}.composition",
                        found=_written(stated),
                        expected=f"{_written(actual)}, each within {STATED_WITHIN:g}",
                    )
                )
        if faults:
            raise InputError(faults)


def _written(amounts: Mapping[str, float]) -> str:
    return "{ " + ", ".join(f"{key} = {share:.5f}" for key, share in amounts.items()) + " } by mole"


def shares(gas: Any) -> dict[str, Any]:
    """Mole fractions [1] by species of an ideal gas, also of a pure one."""
    from reportgen.fluids.gases.blend import mole_fractions

    return mole_fractions(gas)


def is_mixing(piece: Piece) -> bool:
    """Whether ideal gases become a mixture that is another fluid than each of them."""
    end = piece.fluid(piece.one("to"))
    starts = [piece.fluid(state) for state in piece.states("from")]
    if all(same_zero(end, start) for start in starts):
        return False
    return all(model.kind == "ideal-gas" for model in (end, *starts))


def mixing_faults(piece: Piece) -> list[Fault]:
    """What the fluid of the mixture cannot be: of other species than its gases, of another kind of heat capacity."""
    end, starts = piece.one("to"), piece.states("from")
    name = piece.fluid_id(end)
    mixture, gases = piece.fluid(end), [piece.fluid(state) for state in starts]
    found = []
    species = dict.fromkeys(key for gas in gases for key in shares(gas))
    if set(species) != set(shares(mixture)):
        found.append(
            Fault(
                f"{piece.title} makes a mixture of {', '.join(species)}, but fluid {name} of state {end} is another.",
                piece.path("to"),
                found=", ".join(shares(mixture)),
                expected=f"a fluid with composition = {{ {', '.join(f'{key} = ...' for key in species)} }}",
            )
        )
    constant = {name: mixture.constant_heat_capacity is not None}
    constant |= {piece.fluid_id(state): piece.fluid(state).constant_heat_capacity is not None for state in starts}
    if len(set(constant.values())) > 1:
        found.append(
            Fault(
                f"{piece.title} mixes gases of constant heat capacity with others.",
                piece.path("to"),
                found="; ".join(f"{key} {'constant' if flag else 'variable'}" for key, flag in constant.items()),
                expected="a constant heat capacity for all of them and for the mixture, or for none",
            )
        )
    return found


def mixing_results(mixtures: Mixtures, fluid: str, values: Mapping[str, Any]) -> list[Formula]:
    """Mole fractions of a mixture, and the entropy of mixing, from the masses of its gases."""
    blend, masses = mixtures.blends[fluid], mixtures.masses(fluid)
    base = {path: values[path][:1] for path in masses}
    gases = [(gas, path, mixtures.model(gas, base)) for gas, path in blend.gases]
    species = dict.fromkeys(key for _, _, model in gases for key in shares(model))
    return [
        *(_mole_fraction(mixtures, blend, key, gases, masses) for key in species),
        _mixing_entropy(mixtures, blend, gases, masses),
    ]


Gases = Sequence[tuple[str, str, Any]]


def _constants(gases: Gases) -> str:
    """The specific gas constants in words, base case."""
    each = {gas: f"R of {gas} {float(_first(model.gas_constant)):.6g} J/(kg K)" for gas, _, model in gases}
    return ", ".join(each.values())


def _first(number: Any) -> Any:
    return number[0] if getattr(number, "shape", ()) else number


def _constant(gas: str) -> str:
    return rf"R_{{\mathrm{{{gas}}}}}"


def _within(species: str, gas: str) -> str:
    """Symbol of a mole fraction inside one of the gases."""
    return rf"x_{{\mathrm{{{species}}},\mathrm{{{gas}}}}}"


def _is_pure(model: Any) -> bool:
    return len(shares(model)) == 1


def _mole_fraction(mixtures: Mixtures, blend: Blend, species: str, gases: Gases, masses: tuple[str, ...]) -> Formula:
    """x_k = Σ_i m_i R_i x_ik/Σ_i m_i R_i: amounts of substance go as m R."""

    def share(*arrays: Any) -> Any:
        return shares(mixtures.model(blend.fluid, dict(zip(masses, arrays, strict=True))))[species]

    every = [rf"{token(path)}\,{_constant(gas)}" for gas, path, _ in gases]
    holding = [
        part if _is_pure(model) else rf"{part}\,{_within(species, gas)}"
        for part, (gas, _, model) in zip(every, gases, strict=True)
        if species in shares(model)
    ]
    return Formula(
        blend.share(species),
        blend.owner,
        "Mole fraction",
        f"{blend.title}: amounts of substance go as mass times gas constant ({_constants(gases)}).",
        "conservation of each species",
        blend.share(species),
        masses,
        share,
        rf"\frac{{{' + '.join(holding)}}}{{{' + '.join(every)}}}",
        fluids=tuple(dict.fromkeys(gas for gas, _, _ in gases)),
        reason="a mass has no value",
    )


def _mixing_entropy(mixtures: Mixtures, blend: Blend, gases: Gases, masses: tuple[str, ...]) -> Formula:
    """−Σ_i m_i R_i Σ_k x_ik ln(x_k/x_ik)."""
    from reportgen.fluids.gases.blend import mixing_entropy

    def entropy(*arrays: Any) -> Any:
        values = dict(zip(masses, arrays, strict=True))
        models = [mixtures.model(gas, values) for gas, _ in blend.gases]
        return mixing_entropy(models, [values[path] for _, path in blend.gases])

    terms = []
    for gas, path, model in gases:
        inside = []
        for species in shares(model):
            share = token(blend.share(species))
            part = _within(species, gas)
            inside.append(rf"\ln {share}" if _is_pure(model) else rf"{part}\ln\frac{{{share}}}{{{part}}}")
        bracket = inside[0] if len(inside) == 1 else rf"\left({' + '.join(inside)}\right)"
        terms.append(rf"{token(path)}\,{_constant(gas)}{bracket}")
    return Formula(
        f"{blend.owner}.entropy_of_mixing",
        blend.owner,
        "Entropy of mixing",
        f"{blend.title}: so much the mixing alone generates, as at one temperature and one pressure.",
        "ideal mixing, −R Σ n ln x",
        f"{blend.owner}.entropy_of_mixing",
        masses,
        entropy,
        "-" + " - ".join(terms),
        fluids=tuple(dict.fromkeys(gas for gas, _, _ in gases)),
        reason="a mass has no value",
    )
