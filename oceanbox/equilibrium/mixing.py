"""Anderson mixing: a fixed point of a slow map from far fewer applications of it.

Given x_k and g_k = map(x_k), residuals f_k = g_k - x_k, the next iterate is the affine combination of the last g's whose
residual combination is smallest (Anderson 1965, J. ACM 12, 547; Walker and Ni 2011, SIAM J. Numer. Anal. 49, 1715):

    x_{k+1} = sum_i a_i g_i,   a = argmin |sum_i a_i f_i|,   sum_i a_i = 1.

Weights that sum to one keep every linear balance that all g's keep.  Nothing here knows what the map is.
"""

from collections import deque

import numpy as np
from numpy.typing import NDArray

__all__ = ["Mixing"]

Array = NDArray[np.float64]
# Directions whose size is below this share of the largest hold round-off, not information about the map.
SMALLEST_DIRECTION = 1e-6


class Mixing:
    """The memory of the last ``depth`` + 1 applications of a map; ``weight`` (n,) scales entries in the norm."""

    def __init__(self, depth: int, weight: Array) -> None:
        self.weight = weight
        self.images: deque[Array] = deque(maxlen=depth + 1)
        self.residuals: deque[Array] = deque(maxlen=depth + 1)

    def residual_norm(self, argument: Array, image: Array) -> float:
        """Root mean square of the weighted residual over the entries that count."""
        counted = self.weight > 0.0
        return float(np.sqrt(np.mean((self.weight * (image - argument))[counted] ** 2)))

    def next(self, argument: Array, image: Array) -> Array:
        """Take in one application of the map and return where to apply it next; the first time that is the image."""
        self.images.append(image.copy())
        self.residuals.append(image - argument)
        if len(self.images) < 2:
            return image
        latest = self.residuals[-1]
        changes = np.stack([self.weight * (latest - earlier) for earlier in list(self.residuals)[:-1]], axis=1)
        share, *_ = np.linalg.lstsq(changes, self.weight * latest, rcond=SMALLEST_DIRECTION)
        mixed = image.copy()
        for part, earlier in zip(share, list(self.images)[:-1], strict=True):
            mixed -= part * (image - earlier)
        return mixed

    def forget(self) -> None:
        """Start anew."""
        self.images.clear()
        self.residuals.clear()
