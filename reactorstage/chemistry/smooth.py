"""A smooth floor, for real and complex numbers and arrays."""

from __future__ import annotations

from typing import Any

import numpy as np


def floored(a: Any, f: Any) -> Any:
    """(a + sqrt(a^2 + 4 f^2))/2: f at a = 0, a + f^2/a far above, above zero everywhere."""
    return 0.5 * (a + np.sqrt(a * a + 4.0 * f * f))
