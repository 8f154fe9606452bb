"""The compiled kernel: balances of an adiabatic plug-flow bed, their integration and exact derivatives."""
