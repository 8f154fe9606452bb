"""reactorstage: rate and optimise trains of adiabatic catalyst beds with an exothermic reaction."""

__version__ = "0.1.0"
