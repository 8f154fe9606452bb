"""A case compiled into one train: operations, quantities, money and limits, evaluated with derivatives."""
