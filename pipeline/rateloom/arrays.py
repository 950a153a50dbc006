"""Types of the arrays that every room passes around."""

from typing import TypeAlias

import numpy as np
from numpy.typing import NDArray

FloatArray: TypeAlias = NDArray[np.float64]
"""An array of double-precision numbers; the docstring that uses it says shape and unit."""
