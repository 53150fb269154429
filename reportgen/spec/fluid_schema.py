"""Tables of [fluids], one for each property model, and the second sources that states are checked against."""

from __future__ import annotations

from typing import Annotated, Any, Literal, get_args

from pydantic import ConfigDict, Discriminator, Field, Tag

from reportgen.quantities import Quantity, usual_units
from reportgen.spec.fields import CALLED, Bounds, Identifier, QuantityOf, ShortText
from reportgen.spec.table import Table, with_unit

__all__ = [
    "MOST_SOURCES",
    "FluidTable",
    "PolynomialTable",
    "SecondSourceField",
    "SecondSourceTable",
    "second_source_field",
]

#: Second sources of one state.
MOST_SOURCES = 5
MOST_ROWS = 200
MOST_COEFFICIENTS = 12
MOST_PAIRS = 500

SecondModel = Literal["library", "ideal-gas", "real-fluid", "cubic", "statistical"]
#: A state that is not checked although its fluid has a second source.
NO_SECOND_SOURCE = "none"


# --- second sources -------------------------------------------------------------------------------------------------


class SecondSourceTable(Table):
    """A second source with the difference up to which it agrees."""

    model: SecondModel = Field(
        description="Model of the second source; library: the independent property library, where it is installed."
    )
    tolerance: Annotated[Quantity, QuantityOf(("ratio",), Bounds(1e-12, 1.0), certain=True)] | None = Field(
        None, description="Relative difference up to which both sources agree [1]. A number or %."
    )


def _form_of_second_source(value: Any) -> str:
    if isinstance(value, list):
        return "(several)"
    return "(table)" if isinstance(value, dict) else "(name)"


_One = Annotated[
    Annotated[SecondModel, Tag("(name)")] | Annotated[SecondSourceTable, Tag("(table)")],
    Discriminator(_form_of_second_source),
]
_NamedSource = Literal["library", "ideal-gas", "real-fluid", "cubic", "statistical", "none"]
#: A model, a table with its tolerance, or a list of both; "none" for a state that is left out.
SecondSourceField = Annotated[
    Annotated[_NamedSource, Tag("(name)")]
    | Annotated[SecondSourceTable, Tag("(table)")]
    | Annotated[list[_One], Tag("(several)"), Field(min_length=1, max_length=MOST_SOURCES)],
    Discriminator(_form_of_second_source),
]


def second_source_field(of: str) -> Any:
    """The default of a field for second sources; ``of`` says whose they are."""
    models = ", ".join(get_args(SecondModel))
    return Field(
        None,
        description=f"Second source that {of} checked against: {models}; a table with model and tolerance; or a list.",
    )


_OF_FLUID = "the states of this fluid are"


# --- composition ----------------------------------------------------------------------------------------------------

_Fraction = Annotated[Quantity, QuantityOf(("ratio",), Bounds(0.0, 1.0), certain=True)]
#: What shares the dimension of an entropy.
_HEAT = CALLED["specific_heat"]
_IDEAL_GAS = ConfigDict(
    json_schema_extra={
        "oneOf": [{"required": [key]} for key in ("substance", "composition", "products_of")],
        "dependentRequired": {"composition": ["basis"], "basis": ["composition"], "chemistry": ["products_of"]},
    }
)
_SUBSTANCE_OR_COMPOSITION = ConfigDict(
    json_schema_extra={
        "oneOf": [{"required": ["substance"]}, {"required": ["composition"]}],
        "dependentRequired": {"composition": ["basis"], "basis": ["composition"]},
    }
)


class _ComposedTable(Table):
    """A fluid that is one substance or a mixture."""

    substance: ShortText | None = Field(None, description="Substance, as listed by: reportgen fluids.")
    composition: dict[ShortText, _Fraction] | None = Field(
        None, description="Fractions [1] of the substances of a mixture; they add up to 1."
    )
    basis: Literal["mole", "mass"] | None = Field(None, description="What the fractions of the composition count.")


class IdealGasTable(_ComposedTable):
    """A gas with p v = R T."""

    model_config = _IDEAL_GAS

    model: Literal["ideal-gas"] = Field(description="Property model: ideal-gas.")
    products_of: Identifier | None = Field(
        None, description="Tag of the combustor that makes this gas; its composition follows from the flows there."
    )
    chemistry: Literal["complete", "equilibrium"] | None = Field(
        None,
        description="complete: all burns to CO2, H2O, SO2 and HCl, without nitrogen oxides, and needs oxygen enough; "
        "equilibrium: the composition of least Gibbs energy at every state. If not given: complete.",
    )
    heat_capacity: (
        Annotated[Quantity | str, QuantityOf(("specific_entropy",), certain=True, words=("variable",), called=_HEAT)]
        | None
    ) = Field(
        None,
        description='"variable" with temperature (default), or a constant isobaric heat capacity [J/(kg*K)]. '
        f"Units: {', '.join(usual_units('specific_entropy'))}.",
    )
    second_source: SecondSourceField | None = second_source_field(_OF_FLUID)


class RealFluidTable(Table):
    """A pure fluid with its published equation of state."""

    model: Literal["real-fluid"] = Field(description="Property model: real-fluid.")
    substance: ShortText = Field(description="Substance, as listed by: reportgen fluids.")
    reference_state: Literal["published", "IIR", "ASHRAE", "NBP", "third-law"] = Field(
        "published",
        description="Where enthalpy and entropy are zero. published: as the equation of state has it; IIR, ASHRAE, "
        "NBP: for the saturated liquid at 0 degC, at -40 degC, at its normal boiling point; third-law: for the perfect "
        "crystal at 0 K, as for ideal gases.",
    )
    second_source: SecondSourceField | None = second_source_field(_OF_FLUID)


# --- cubic equations of state ---------------------------------------------------------------------------------------


class CriticalTable(Table):
    """Critical constants of a substance that is not carried, or in place of those carried."""

    temperature: Annotated[Quantity, QuantityOf(("temperature",), certain=True)] = Field(
        description=with_unit("Critical temperature", ("temperature",))
    )
    pressure: Annotated[Quantity, QuantityOf(("pressure",), certain=True)] = Field(
        description=with_unit("Critical pressure, absolute or gauge", ("pressure",))
    )
    acentric_factor: float = Field(ge=-1.0, le=3.0, description="Acentric factor [1].")
    source: ShortText | None = Field(None, description="Where the constants are taken from.")


class InteractionTable(Table):
    """Binary interaction coefficient of two substances of the mixture."""

    between: list[ShortText] = Field(
        min_length=2, max_length=2, description="Two substances, named as in the composition."
    )
    coefficient: float = Field(ge=-2.0, le=1.0, description="k_ij [1] in a_ij = (a_i a_j)^(1/2) (1 - k_ij).")
    source: ShortText | None = Field(None, description="Where the coefficient is taken from.")


def _form_of_translation(value: Any) -> str:
    return "(table)" if isinstance(value, dict) else "(name)"


_MolarVolume = Annotated[Quantity, QuantityOf(("molar_volume",), certain=True)]


class CubicTable(_ComposedTable):
    """A fluid or mixture with a cubic equation of state."""

    model_config = _SUBSTANCE_OR_COMPOSITION

    model: Literal["cubic"] = Field(description="Property model: cubic.")
    equation: Literal["Peng-Robinson", "Soave-Redlich-Kwong"] = Field(description="Which cubic equation of state.")
    critical: dict[ShortText, CriticalTable] | None = Field(
        None,
        description="Critical constants by substance, where those carried are not to be used.",
        examples=[{"CO2": {"temperature": "304.13 K", "pressure": "73.77 bar", "acentric_factor": 0.224}}],
    )
    interaction: list[InteractionTable] | None = Field(
        None,
        max_length=MOST_PAIRS,
        description="Binary interaction coefficients; zero for pairs that are not listed.",
        examples=[[{"between": ["CO2", "N2"], "coefficient": -0.017}]],
    )
    volume_translation: (
        Annotated[
            Annotated[Literal["Peneloux"], Tag("(name)")] | Annotated[dict[ShortText, _MolarVolume], Tag("(table)")],
            Discriminator(_form_of_translation),
        ]
        | None
    ) = Field(
        None,
        description='Shift of the molar volume that mends liquid densities: "Peneloux", or by substance [m3/mol]. '
        f"Units: {', '.join(usual_units('molar_volume'))}.",
    )
    second_source: SecondSourceField | None = second_source_field(_OF_FLUID)


# --- incompressible -------------------------------------------------------------------------------------------------


_CERTAIN_HEAT = QuantityOf(("specific_entropy",), Bounds(1e-3), certain=True, called=_HEAT)


class PolynomialTable(Table):
    """Specific heat capacity as a polynomial c = a0 + a1 t + a2 t2 + ... with t = (T - about)/K."""

    coefficients: list[float] = Field(
        min_length=1, max_length=MOST_COEFFICIENTS, description="a0, a1, ... [unit, with powers of 1/K]."
    )
    unit: Literal["J/(kg*K)", "kJ/(kg*K)"] = Field(description="Unit of the specific heat capacity that they give.")
    about: Annotated[Quantity, QuantityOf(("temperature",), certain=True)] | None = Field(
        None, description=with_unit("Temperature from which t counts, in kelvins; 0 K if not given", ("temperature",))
    )


class HeatRowTable(Table):
    """One row of a table of specific heat capacities."""

    temperature: Annotated[Quantity, QuantityOf(("temperature",), certain=True)] = Field(
        description=with_unit("Temperature", ("temperature",))
    )
    specific_heat: Annotated[Quantity, _CERTAIN_HEAT] = Field(
        description=with_unit("Specific heat capacity there; straight lines between the rows", ("specific_entropy",))
    )


def _form_of_specific_heat(value: Any) -> str:
    if isinstance(value, list):
        return "(rows)"
    return "(polynomial)" if isinstance(value, dict) and "value" not in value else "(constant)"


class IncompressibleTable(Table):
    """A liquid or solid of constant density."""

    model: Literal["incompressible"] = Field(description="Property model: incompressible.")
    substance: ShortText | None = Field(None, description="What it is, in any words, such as: thermal oil.")
    density: Annotated[Quantity, QuantityOf(("density",), certain=True)] = Field(
        description=with_unit("Mass density, the same in every state", ("density",))
    )
    specific_heat: Annotated[
        Annotated[Quantity, _CERTAIN_HEAT, Tag("(constant)")]
        | Annotated[PolynomialTable, Tag("(polynomial)")]
        | Annotated[list[HeatRowTable], Tag("(rows)"), Field(min_length=2, max_length=MOST_ROWS)],
        Discriminator(_form_of_specific_heat),
    ] = Field(
        description="Specific heat capacity [J/(kg*K)]: a constant, a polynomial, or rows of temperature and "
        f"specific_heat. Units: {', '.join(usual_units('specific_entropy'))}."
    )
    phase: Literal["liquid", "solid"] = Field("liquid", description="liquid or solid.")
    minimum_temperature: Annotated[Quantity, QuantityOf(("temperature",), certain=True)] | None = Field(
        None, description=with_unit("Lowest temperature of the data; of rows, the first if not given", ("temperature",))
    )
    maximum_temperature: Annotated[Quantity, QuantityOf(("temperature",), certain=True)] | None = Field(
        None, description=with_unit("Highest temperature of the data; of rows, the last if not given", ("temperature",))
    )
    source: ShortText | None = Field(None, description="Where density and specific heat are taken from.")
    second_source: SecondSourceField | None = second_source_field(_OF_FLUID)


FluidTable = Annotated[IdealGasTable | RealFluidTable | CubicTable | IncompressibleTable, Field(discriminator="model")]
