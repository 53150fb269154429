r"""Relations between values: sums of products, and formulae with one output.

A :class:`Balance` is a sum of products that equals zero, 0 = Σ c_k Π x_kj. It yields its residual, its derivatives,
a direct solution for every variable that occurs linearly, and the LaTeX of that solution. A :class:`Formula` is
y = f(x1, x2, …) on arrays, with inverses where they are known in closed form. Both only carry data and plain
arithmetic: arrays are handed in, so that this module needs no numpy.

LaTeX templates name a value by its path between ⟦ and ⟧; whoever shows the template puts the symbol or the number
of that value there.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Mapping, Sequence
from dataclasses import dataclass, field, replace
from typing import Any

__all__ = [
    "Balance",
    "Default",
    "Equation",
    "Exchange",
    "Formula",
    "Formulas",
    "HeatPort",
    "Inverse",
    "Relation",
    "Stretch",
    "Term",
    "token",
    "zero",
]

#: An array along the sample axis (or anything with array arithmetic).
Array = Any


def token(path: str) -> str:
    """The place of a value in a LaTeX template."""
    return f"⟦{path}⟧"


@dataclass(frozen=True)
class Equation:
    """One line of the working: left and right side as LaTeX templates.

    ``evaluate`` computes the right side from values by path where that is plain arithmetic, else it is None.
    """

    left: str
    right: str
    evaluate: Callable[[Mapping[str, Array]], Array] | None = field(default=None, compare=False, repr=False)

    @property
    def latex(self) -> str:
        """The whole template, ``left = right``."""
        return f"{self.left} = {self.right}"


@dataclass(frozen=True)
class Term:
    """A product: coefficient times the values of some paths; ``label`` is the coefficient's LaTeX when it is not 1."""

    coefficient: float
    factors: tuple[str, ...]
    label: str = ""

    def without(self, path: str) -> Term:
        """The same product with one occurrence of a factor left out."""
        factors = list(self.factors)
        factors.remove(path)
        return Term(self.coefficient, tuple(factors), self.label)

    def value(self, values: Mapping[str, Array]) -> Array:
        """The product in numbers."""
        result: Array = self.coefficient
        for factor in self.factors:
            result = result * values[factor]
        return result


def _magnitude(term: Term, skip_first: bool = False) -> str:
    """LaTeX of a term without its sign."""
    factors = term.factors[1:] if skip_first else term.factors
    parts = [term.label] if term.label else []
    done: set[str] = set()
    for factor in factors:
        if factor in done:
            continue
        done.add(factor)
        power = factors.count(factor)
        parts.append(token(factor) if power == 1 else rf"\left({token(factor)}\right)^{{{power}}}")
    return r"\,".join(parts) if parts else "1"


def _sum(terms: Sequence[tuple[float, str]]) -> str:
    """LaTeX of a signed sum, positive parts first when the sum would begin with a minus sign."""
    if not terms:
        return "0"
    ordered = list(terms)
    if ordered[0][0] < 0:
        ordered.sort(key=lambda item: item[0] < 0)
    text = ("-" if ordered[0][0] < 0 else "") + ordered[0][1]
    for sign, part in ordered[1:]:
        text += (" - " if sign < 0 else " + ") + part
    return text


def sum_latex(terms: Sequence[Term], sign: float = 1.0) -> str:
    """LaTeX of a sum of products; neighbours with the same first factor are bracketed together."""
    parts: list[tuple[float, str]] = []
    index = 0
    while index < len(terms):
        last = index + 1
        first = terms[index].factors[0] if len(terms[index].factors) > 1 else None
        while first and last < len(terms) and len(terms[last].factors) > 1 and terms[last].factors[0] == first:
            last += 1
        if first and last - index > 1:
            inner = [(sign * term.coefficient, _magnitude(term, skip_first=True)) for term in terms[index:last]]
            # A bracket opens with a positive product; at the head of a sum it takes no minus sign if it can do without.
            all_negative = all(part[0] < 0 for part in inner)
            outer = -1.0 if all_negative or (parts and inner[0][0] < 0) else 1.0
            inner = [(outer * part[0], part[1]) for part in inner]
            parts.append((outer, rf"{token(first)}\left({_sum(inner)}\right)"))
        else:
            parts.append((sign * terms[index].coefficient, _magnitude(terms[index])))
            last = index + 1
        index = last
    return _sum(parts)


@dataclass(frozen=True)
class Balance:
    """A sum of products that equals zero.

    ``sentence`` says in words what the relation states; ``sentences`` and ``forms`` hold words and a hand-set
    equation for particular unknowns. ``unsolvable`` are variables the relation must not be solved for.
    """

    key: str
    owner: str
    name: str
    sentence: str
    basis: str
    terms: tuple[Term, ...]
    forms: Mapping[str, Equation] = field(default_factory=dict)
    sentences: Mapping[str, str] = field(default_factory=dict)
    unsolvable: frozenset[str] = frozenset()

    @property
    def variables(self) -> tuple[str, ...]:
        """Every path that occurs, once, in order."""
        return tuple(dict.fromkeys(factor for term in self.terms for factor in term.factors))

    @property
    def solvable(self) -> tuple[str, ...]:
        """The paths the relation may be solved for."""
        return tuple(path for path in self.variables if path not in self.unsolvable)

    def residual(self, values: Mapping[str, Array]) -> Array:
        """The sum, zero when the relation holds."""
        result: Array = 0.0
        for term in self.terms:
            result = result + term.value(values)
        return result

    def derivative(self, path: str, values: Mapping[str, Array]) -> Array:
        """Derivative of the sum with respect to one variable."""
        result: Array = 0.0
        for term in self.terms:
            count = term.factors.count(path)
            if count:
                result = result + count * term.without(path).value(values)
        return result

    def is_linear_in(self, paths: Iterable[str]) -> bool:
        """True when no product holds two of the paths (or one of them twice)."""
        wanted = set(paths)
        return all(sum(factor in wanted for factor in term.factors) <= 1 for term in self.terms)

    def is_square_in(self, path: str) -> bool:
        """True when the path occurs as its square only, as a velocity does in a kinetic energy."""
        return all(term.factors.count(path) in (0, 2) for term in self.terms)

    def is_direct_in(self, path: str) -> bool:
        """True when ``direct`` gives the path in closed form."""
        return self.is_linear_in((path,)) or self.is_square_in(path)

    def direct(self, path: str, values: Mapping[str, Array]) -> Array:
        """The value of one variable that occurs linearly, or as its square (then the positive root), from all others.

        NaN where a square would be negative.
        """
        square = self.is_square_in(path)
        slope: Array = 0.0
        rest: Array = 0.0
        for term in self.terms:
            if path in term.factors:
                bare = term.without(path).without(path) if square else term.without(path)
                slope = slope + bare.value(values)
            else:
                rest = rest + term.value(values)
        # Adding zero turns −0.0 into 0.0.
        return (-rest / slope) ** 0.5 if square else -rest / slope + 0.0

    def solved(self, path: str) -> Equation:
        """The equation written for one variable."""
        return replace(self._written(path), evaluate=lambda values: self.direct(path, values))

    def _written(self, path: str) -> Equation:
        if path in self.forms:
            return self.forms[path]
        square = self.is_square_in(path)
        slope = [term.without(path) for term in self.terms if path in term.factors]
        slope = [term.without(path) for term in slope] if square else slope
        rest = [term for term in self.terms if path not in term.factors]
        sign = self._orientation(slope, rest)
        numerator = sum_latex(rest, -sign)
        if len(slope) == 1 and not slope[0].factors and not slope[0].label:
            right = numerator
        else:
            right = rf"\frac{{{numerator}}}{{{sum_latex(slope, sign)}}}"
        return Equation(token(path), rf"\sqrt{{{right}}}" if square else right)

    @staticmethod
    def _orientation(slope: Sequence[Term], rest: Sequence[Term]) -> float:
        """Sign that makes the divisor positive, or, where it is a difference, as many products above it as can be."""
        signs = {term.coefficient > 0 for term in slope}
        if len(signs) == 1:
            return 1.0 if True in signs else -1.0
        above = sum(-1 if term.coefficient > 0 else 1 for term in rest)
        if above:
            return 1.0 if above > 0 else -1.0
        return 1.0 if slope[0].coefficient > 0 else -1.0

    def balanced(self) -> Equation:
        """The equation with positive products on the left and negative ones on the right."""
        left = [term for term in self.terms if term.coefficient > 0]
        right = [term for term in self.terms if term.coefficient < 0]
        return Equation(sum_latex(left), sum_latex(right, -1.0))

    def words(self, path: str) -> str:
        """The sentence when the relation is solved for a path."""
        return self.sentences.get(path, self.sentence)


@dataclass(frozen=True)
class Inverse:
    """A formula turned round: the input from the output and the other inputs, with its right side in LaTeX."""

    evaluate: Callable[..., Array]
    latex: str
    sentence: str = ""


@dataclass(frozen=True)
class Formula:
    """y = f(x1, x2, …) on arrays; NaN where it cannot be had.

    ``evaluate`` takes the inputs in order. ``inverses`` give an input in closed form: they take the arrays in the
    order of ``inputs`` with the output in the place of the input asked for. ``solvable_inputs`` are the inputs the
    relation may be solved for in any way (None: all). ``fluids`` are the fluids whose properties it uses. ``reason``
    says why the value may be missing; ``explain`` says it from the inputs, single numbers. ``written`` gives the LaTeX
    from values where it depends on them.
    ``slopes`` gives the derivatives by each input where differences would not do.
    """

    key: str
    owner: str
    name: str
    sentence: str
    basis: str
    output: str
    inputs: tuple[str, ...]
    evaluate: Callable[..., Array]
    latex: str
    inverses: Mapping[str, Inverse] = field(default_factory=dict)
    solvable_inputs: tuple[str, ...] | None = None
    fluids: tuple[str, ...] = ()
    reason: str = ""
    slopes: Callable[..., Sequence[Array]] | None = None
    written: Callable[[Mapping[str, Array]], str] | None = None
    explain: Callable[..., str] | None = None

    @property
    def variables(self) -> tuple[str, ...]:
        """Output and inputs."""
        return tuple(dict.fromkeys((self.output, *self.inputs)))

    @property
    def solvable(self) -> tuple[str, ...]:
        """The paths the relation may be solved for."""
        return (self.output, *(self.inputs if self.solvable_inputs is None else self.solvable_inputs))

    def balanced(self, values: Mapping[str, Array] | None = None) -> Equation:
        """The equation as it stands; with ``values`` in the form that suits them."""
        latex = self.latex if self.written is None or values is None else self.written(values)
        return self._equation(self.output, latex, self.evaluate, self.inputs)

    def turned(self, path: str) -> Equation:
        """The equation written for an input that has an inverse."""
        inverse = self.inverses[path]
        return self._equation(path, inverse.latex, inverse.evaluate, self.turned_inputs(path))

    def turned_inputs(self, path: str) -> tuple[str, ...]:
        """What the inverse of an input takes, in order."""
        return tuple(self.output if known == path else known for known in self.inputs)

    def _equation(self, path: str, latex: str, evaluate: Callable[..., Array], inputs: tuple[str, ...]) -> Equation:
        if self.fluids:  # a property model stands in it
            return Equation(token(path), latex)
        return Equation(token(path), latex, lambda values: evaluate(*(values[known] for known in inputs)))

    def words(self, path: str) -> str:
        """The sentence when the relation is solved for a path."""
        if path in self.inverses and self.inverses[path].sentence:
            return self.inverses[path].sentence
        return self.sentence


@dataclass(frozen=True)
class Formulas:
    """Several values from the same inputs in one step: (y1, y2, …) = f(x1, x2, …).

    ``evaluate`` takes the inputs in order and gives an array for each of ``outputs``. ``latex`` holds the right sides
    of those outputs whose equations are shown.
    """

    key: str
    owner: str
    name: str
    sentence: str
    basis: str
    outputs: tuple[str, ...]
    inputs: tuple[str, ...]
    evaluate: Callable[..., Sequence[Array]]
    latex: Mapping[str, str]
    fluids: tuple[str, ...] = ()


Relation = Balance | Formula


@dataclass(frozen=True)
class Default:
    """An assumption that stands in when neither the givens nor another relation determine a quantity.

    It adds ``relation`` to the network, and rewrites the relations named in ``rewrites`` (a valve without heat exchange
    keeps its enthalpy, whatever its flow). ``rank``: lower ones are tried first: 0 a valve without heat exchange,
    1 pressures that are kept, 2 pressures of mixed streams, 3 other heats and powers. Pressure losses come before the
    heat of exchangers, since nobody means a pressure to be found from a temperature and an enthalpy. ``only_for``: the
    one variable of the relation that it may be taken for (None: any).
    """

    key: str
    owner: str
    text: str
    affects: tuple[str, ...]
    relation: Relation
    rewrites: Mapping[str, Callable[[Any], Relation]] = field(default_factory=dict)
    rank: int = 3
    only_for: str | None = None


@dataclass(frozen=True)
class HeatPort:
    """Heat that crosses the boundary of a piece: paths of heat, boundary temperature and entropy carried.

    ``into``: the states of the stream it goes into (None: any of the piece). ``beside``: it is no part of the ``heat``
    of the piece, as what bearings lose.
    """

    label: str
    heat: str
    temperature: str
    entropy: str
    into: tuple[str, ...] | None = None
    beside: bool = False


@dataclass(frozen=True)
class Exchange:
    """Heat at ``path`` that the stream of the states ``giver`` gives to that of the states ``taker``."""

    path: str
    giver: tuple[str, ...]
    taker: tuple[str, ...]


@dataclass(frozen=True)
class Stretch:
    """How a stream changes from one state to another.

    ``along`` is one of :mod:`reportgen.balances.curves`. ``role`` names the stream; ``mixing`` marks a line that only
    joins two states.
    """

    role: str
    start: str
    end: str
    along: str
    mixing: bool = False


def zero(path: str, key: str, owner: str, name: str, sentence: str) -> Balance:
    """The relation that sets one value to zero."""
    return Balance(key, owner, name, sentence, "assumption", (Term(1.0, (path,)),))
