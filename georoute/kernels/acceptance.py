"""How much dearer a tour may be and still be accepted.

N. Metropolis et al., Journal of Chemical Physics 21 (1953) 1087-1092; S. Kirkpatrick,
C. Gelatt, M. Vecchi, Science 220 (1983) 671-680, with a temperature that falls in a line to 0.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from georoute.kernels._jit import Float, Int, kernel
from georoute.kernels.random_stream import uniform

__all__ = ["dearer_by"]


@kernel
def dearer_by(
    stream: NDArray[np.uint64], heat: Float, done: Int, total: Int, spent: Float
) -> Float:
    """Draw the money by which a tour may be dearer than the one before.

    ``heat`` is the temperature at the start in the unit of the cost; ``done`` of ``total``
    trials are made and the share ``spent`` of a budget in time is used, whichever is more.
    """
    left = 1.0 - max(spent, done / total)
    return -heat * max(0.0, left) * np.log(1.0 - uniform(stream))
