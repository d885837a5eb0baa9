"""Constants and the array type of the ground floor."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]
BoolArray = NDArray[np.bool_]

STANDARD_GRAVITY = 9.80665  # m/s2, conventional value (CGPM 1901)
ZERO_CELSIUS = 273.15  # K
