"""Laws: pure keyword-only functions on SI floats and arrays. They know no plan.

Arrays hold one number a row (qubit) on their last axis; vectors add a last axis of three components in the chip frame
(c1, c2 in the plane, c3 along its normal); anything before the rows is a study's axis and broadcasts.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]
