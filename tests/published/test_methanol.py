"""Methanol on a bench scale: Vanden Bussche and Froment, J. Catal. 161 (1996) 1, Table 3 and Fig. 5."""

from __future__ import annotations

import numpy as np
import pytest

from tests.bed.build import one_bed, programme
from tests.chemistry.published_laws import LAWS


def test_ME_3_adiabatic_bench_reactor() -> None:
    """34.8 g of catalyst over 0.15 m, 493.2 K, 50 bar, 2.8e-5 kg/s of CO 4, CO2 3, H2 82, Ar 11 %.

    Inputs and constants from memory of the paper (its inert is not named, argon here), results recomputed:
    0.05 K, 0.002 mol %. Where CO is most and where 95 % of the rise is reached as printed.
    """
    species, reactions, composition = LAWS["methanol"]
    feed = {"flow": "2.8e-5 kg/s", "temperature": "493.2 K", "composition": composition}
    rating = programme(one_bed(species, reactions, feed, "0.0348 kg", "50 bar(a)")).rate()
    along = rating.profiles[0]
    y = 100.0 * along.F / along.F.sum(axis=1, keepdims=True)
    mm = 150.0 * along.w / along.w[-1]
    assert along.T[-1] == pytest.approx(553.18, abs=0.05)
    assert y[-1, [0, 4, 1, 3]] == pytest.approx([2.996, 2.244, 2.074, 1.061], abs=0.002)
    assert mm[np.argmax(y[:, 0])] == pytest.approx(3.7, abs=0.1)
    assert np.interp(0.95, (along.T - along.T[0]) / np.ptp(along.T), mm) == pytest.approx(35.0, abs=0.5)
