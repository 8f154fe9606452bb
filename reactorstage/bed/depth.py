"""Catalyst activity along the depth of a bed: straight lines between points, level outside them."""

from __future__ import annotations

from reactorstage.bed.compiled import compiled
from reactorstage.bed.layout import at_profile


@compiled
def local_activity(chem, bed, depth):
    """What multiplies the catalyst activity of a bed that has a profile, at a depth from 0 to 1."""
    point, end = at_profile(chem), bed.shape[0]
    if depth <= bed[point]:
        return bed[point + 1]
    for i in range(point + 2, end, 2):
        if depth <= bed[i]:
            part = (depth - bed[i - 2]) / (bed[i] - bed[i - 2])
            return bed[i - 1] + part * (bed[i + 1] - bed[i - 1])
    return bed[end - 1]


@compiled
def next_kink(chem, bed, depth):
    """The next depth at which a step has to end: that of a point, or 1."""
    for i in range(at_profile(chem), bed.shape[0], 2):
        if depth < bed[i] < 1.0:
            return bed[i]
    return 1.0
