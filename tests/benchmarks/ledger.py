"""Limits and money of the lead case from the streams round its beds: what every reference route shares."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from tests.benchmarks.gas import Gas
from tests.benchmarks.lead import Array, Lead


@dataclass(frozen=True)
class Streams:
    """Flows into and out of the beds (4, S), their temperatures (4,), the ethylene feed to each (4,)."""

    F_in: Array
    F_out: Array
    T_in: Array
    T_out: Array
    injected: Array


class Ledger:
    """Cost (per second) and the 34 margins of the lead case, in the order in which `check` lists them."""

    def __init__(self, lead: Lead, gas: Gas):
        self.lead, self.gas = lead, gas
        self.h_benzene = float(lead.benzene @ gas.h(lead.benzene_T))
        self.h_ethylene = float(lead.ethylene_makeup @ gas.h(lead.ethylene_T))
        self.h_reach = gas.h(lead.reach)
        self.h_effluent = gas.h(lead.effluent_T)

    def of(self, streams: Streams) -> Array:
        """(35,) cost, then margins."""
        lead, gas = self.lead, self.gas
        F_in, F_out, T_in, T_out = streams.F_in, streams.F_out, streams.T_in, streams.T_out
        H_in = (F_in * gas.h(T_in).T).sum(axis=1)
        H_out = (F_out * gas.h(T_out).T).sum(axis=1)
        fired = H_in[0] - self.h_benzene - streams.injected[0] * self.h_ethylene
        mixed = H_out[:3] + streams.injected[1:] * self.h_ethylene
        cooled = mixed - H_in[1:]
        effluent = H_out[3] - F_out[3] @ self.h_effluent
        money = fired * lead.fired_price
        money += lead.by_product_price * F_out[3, lead.index("diethylbenzene")]
        money += sum(self.earned(F_in[g + 1], mixed[g], cooled[g]) for g in range(3))
        money += self.earned(F_out[3], H_out[3], effluent)
        furnace_T = gas.temperature(lead.benzene, self.h_benzene + fired, T_in[0])
        benzene, ethylene = F_in[:, lead.index("benzene")], F_in[:, lead.index("ethylene")]
        return np.concatenate(
            [
                [money],
                lead.bounds["hot exit", "at most"] - T_out,
                T_in - lead.bounds["light-off", "at least"],
                benzene - lead.bounds["coking", "at least"] * ethylene,
                lead.bounds["rise", "at most"] - (T_out - T_in),
                self.between("valve", streams.injected),
                self.between("cooler", cooled),
                lead.bounds["slip", "at most"] - F_out[3, lead.index("ethylene")],
                [fired, effluent],
                lead.bounds["reach of fired heater", "at most"] - furnace_T,
            ]
        )

    def between(self, label: str, values: Array) -> Array:
        """Margins above the least and below the most, for each value in turn."""
        low, high = self.lead.bounds[label, "at least"], self.lead.bounds[label, "at most"]
        return np.column_stack([values - low, high - values]).ravel()

    def earned(self, F: Array, H: float, Q: float) -> float:
        """Money for the heat Q of a stream of enthalpy flow H: each part to the best level it reaches."""
        above = np.clip(H - F @ self.h_reach, 0.0, Q)
        above[0] = Q
        return float((above - np.append(above[1:], 0.0)) @ self.lead.price)
