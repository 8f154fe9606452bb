"""Constants, denominators, own equilibrium constants and effectiveness of a rate law as they are written."""

from __future__ import annotations

from typing import Annotated, Any, ClassVar, Literal

from pydantic import ConfigDict, Field, model_validator

from reactorstage.case.fields import In, Raw
from reactorstage.case.marks import UNREADABLE
from reactorstage.case.word_fields import Choice, InUnit, Orders, Powers, RawText, TextOr
from reactorstage.case.words import Name, Words

RATE_CONSTANT = RawText(positive=True, example="4.2e-3 kmol/(kg h bar^2)")
TERM_CONSTANT = RawText(positive=True, example="0.3 1/bar")
EQUILIBRIUM_CONSTANT = RawText(positive=True, example="2.4e-3 bar^-2")
FACTOR = In("number", above=0.0)
ONE_WAY: dict[str, Any] = {"oneOf": [{"required": ["is"]}, {"required": ["exp of"]}]}
Shape = Annotated[Literal["slab", "sphere"], Choice("slab", "sphere")]


def per_kelvin(n: int) -> str:
    """Unit of the coefficient of T^n."""
    return "" if not n else "1/K" if n == 1 else f"1/K^{n}"


class Exponential(Words):
    """exp(a + b/T + c ln T + d T), T in K."""

    a: Annotated[float, In("number")] = Field(description="a plain number")
    b: Annotated[float, InUnit("K")] = Field(0.0, description="in K, as in -5473 K")
    c: Annotated[float, In("number")] = Field(0.0, description="a plain number")
    d: Annotated[float, InUnit("1/K")] = Field(0.0, description="in 1/K")


class TemperatureForm(Words):
    """A constant: its value `is`, with what changes it with temperature, or `exp of` with `in` its unit."""

    model_config = ConfigDict(json_schema_extra=ONE_WAY)

    is_: Annotated[Raw, RATE_CONSTANT] | None = Field(None, description="value with its unit")
    at: Annotated[float, In("temperature", above=0.0)] | None = Field(
        None, description="temperature at which the value holds; without it: pre-exponential factor"
    )
    exp_of: Exponential | None = Field(None, description="instead of `is`: exp(a + b/T + c ln T + d T)")
    in_: Name | None = Field(None, description="unit of what `exp of` gives, as in kmol/(kg h bar^2)")
    energy_key: ClassVar[str] = ""

    @model_validator(mode="before")
    @classmethod
    def _stand_in(cls, raw: Any) -> Any:
        return {"is": UNREADABLE} if raw is UNREADABLE else raw

    @property
    def energy(self) -> float | None:
        """What changes the value with temperature, J/mol: exp(-energy/R (1/T - 1/at))."""
        found: float | None = getattr(self, self.energy_key.replace(" ", "_"))
        return found


class Constant(TemperatureForm):
    """A rate constant, k = is exp(-E/R (1/T - 1/at)); without `at`, k = is exp(-E/(R T))."""

    is_: Annotated[Raw, RATE_CONSTANT] | None = Field(
        None, description="value; its unit must fit `rate per`, `driven by` and the sum of the orders"
    )
    activation_energy: Annotated[float, In("molar energy")] | None = Field(
        None, description="E; none: no change with T"
    )
    energy_key: ClassVar[str] = "activation energy"


class TermConstant(TemperatureForm):
    """Constant of a term below the line, K = is exp(-heat/R (1/T - 1/at)); adsorption sets heat free."""

    is_: Annotated[Raw, TERM_CONSTANT] | None = Field(
        None, description="value; its unit must undo that of the term's orders, as in 0.3 1/bar"
    )
    heat: Annotated[float, In("molar energy")] | None = Field(
        None, description="heat of adsorption, below zero when heat is set free; none: no change with T"
    )
    energy_key: ClassVar[str] = "heat"


class EquilibriumConstant(TemperatureForm):
    """Equilibrium constant of the equation as written, K = is exp(-dH/R (1/T - 1/at))."""

    is_: Annotated[Raw, EQUILIBRIUM_CONSTANT] | None = Field(
        None, description="value, in a unit of pressure or concentration to the change of moles"
    )
    heat_of_reaction: Annotated[float, In("molar energy")] | None = Field(
        None, description="dH, below zero for an exothermic reaction"
    )
    energy_key: ClassVar[str] = "heat of reaction"


class Term(Words):
    """One term of a sum below the line: a constant times drivers to powers."""

    constant: Annotated[TermConstant, TextOr.key("is", TERM_CONSTANT)] = Field(
        description="as in 0.3 1/bar, or with its change with temperature"
    )
    orders: Annotated[dict[str, float], Orders(as_written=False)] = Field(
        {}, description="order of each species in this term, as in {SO2: 1}"
    )


class Factor(Words):
    """A factor below the line: a sum of terms to a power (Hougen and Watson's adsorption group)."""

    power: Annotated[float, In("number", least=-9.0, most=9.0)] = Field(1.0, description="whole or broken")
    terms: tuple[Annotated[Term, TextOr.key("constant", TERM_CONSTANT)], ...] = Field(
        description="plain numbers such as 1, and constant with orders", min_length=1
    )


class OwnEquilibrium(Words):
    """An equilibrium constant of the law's own; it is held against the Gibbs energies."""

    equilibrium_constant: Annotated[EquilibriumConstant, TextOr.key("is", EQUILIBRIUM_CONSTANT)] = Field(
        description="of the equation as written"
    )
    may_differ_from_Gibbs_by: Annotated[float, In("fraction", least=0.0)] = Field(
        0.1, description="largest share by which K may lie off that of the Gibbs energies; none: 10 %"
    )
    heat_may_differ_by: Annotated[float, In("molar energy", least=0.0)] = Field(
        5e3, description="largest difference of the heat of reaction (slope of ln K); none: 5 kJ/mol"
    )


class Conversion(Words):
    """Part of one species that has become another, from mole fractions and the equation."""

    of: Name = Field(description="species that is consumed")
    into: Name = Field(description="species that it becomes")


class ThieleModulus(Words):
    """What a first-order Thiele modulus is made of; the particle's kinetics are those of the law."""

    size: Annotated[float, In("length", above=0.0)] = Field(
        description="half the thickness of a slab, radius of a sphere"
    )
    diffusivity: Annotated[float, InUnit("m^2/s", above=0.0)] = Field(
        description="effective diffusivity in the pores"
    )
    key_species: Name = Field(description="species whose diffusion limits the rate")
    shape: Shape = Field(description="slab or sphere")
    particle_density: Annotated[float, In("density", above=0.0)] = Field(
        description="catalyst mass per volume of particle"
    )


class Effectiveness(Words):
    """Actual rate over the rate without pore limitation: a number, a polynomial, or from a Thiele modulus."""

    model_config = ConfigDict(
        json_schema_extra={
            "oneOf": [{"required": [key]} for key in ("factor", "powers of T", "Thiele")],
            "dependencies": {
                "powers of conversion": ["powers of T", "conversion"],
                "conversion": ["powers of conversion"],
            },
        }
    )

    factor: Annotated[float, FACTOR] | None = Field(None, description="a fixed number")
    powers_of_T: Annotated[tuple[float, ...], Powers(per_kelvin, '[0.9, "-5e-4 1/K"]')] | None = Field(
        None, description="b0, b1 ... of b0 + b1 T + b2 T^2 ..., with units 1/K, 1/K^2 ..."
    )
    powers_of_conversion: Annotated[tuple[float, ...], Powers(lambda n: "", "[1.2, -0.4]")] | None = Field(
        None, description="c1, c2 ... of c1 Z + c2 Z^2 ..., added to the powers of T"
    )
    conversion: Conversion | None = Field(None, description="what Z is")
    Thiele: ThieleModulus | None = Field(None, description="from a first-order Thiele modulus")

    @model_validator(mode="before")
    @classmethod
    def _stand_in(cls, raw: Any) -> Any:
        return {"factor": UNREADABLE} if raw is UNREADABLE else raw
