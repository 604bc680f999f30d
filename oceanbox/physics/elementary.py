"""Exponential and logarithm written out, so that the compiler can turn loops that call them into vector loops.

Arguments are reduced by powers of two and what is left is a power series: both to a few units of the last place, over the range
the closures need.  Only non-negative arguments are meant.
"""

import numpy as np

from oceanbox.compiling import kernel

__all__ = ["decay", "log_of_one_plus", "mean_of_decay", "mean_of_dilution"]

PER_LN2 = 1.4426950408889634
# ln 2 in two parts: a product of the first with a small whole number is exact.
LN2_HIGH, LN2_LOW = 6.93147180369123816490e-01, 1.90821492927058770002e-10
LN2 = LN2_HIGH + LN2_LOW
# Below this exp(-x) is no longer a normal number.
LARGEST_EXPONENT = 708.0
BIAS, MANTISSA_BITS = 1023, 52
MANTISSA = (1 << MANTISSA_BITS) - 1
ONE = BIAS << MANTISSA_BITS
SQRT_2 = 1.4142135623730951
# The mean of a decay over a time is taken from its series up to this exponent.
SERIES_END = 0.5


@kernel
def power_of_half(n: np.int32) -> float:
    """2^-n, for 0 <= n < 1023, put together from its bits."""
    return np.int64(np.int64(BIAS - n) << np.int64(MANTISSA_BITS)).view(np.float64)


@kernel
def decay(x: float) -> float:
    """exp(-x) for x >= 0: 2^-n exp(r) with |r| <= ln 2/2 from its power series; beyond 708 the value there, 3e-308."""
    x = min(x, LARGEST_EXPONENT)
    n = np.int32(x * PER_LN2 + 0.5)
    r = (n * LN2_HIGH - x) + n * LN2_LOW
    p = 1.0 / 40320.0 + r * (1.0 / 362880.0 + r * (1.0 / 3628800.0 + r * (1.0 / 39916800.0 + r * (1.0 / 479001600.0))))
    p = 1.0 / 6.0 + r * (1.0 / 24.0 + r * (1.0 / 120.0 + r * (1.0 / 720.0 + r * (1.0 / 5040.0 + r * p))))
    return (1.0 + r * (1.0 + r * (0.5 + r * p))) * power_of_half(n)


@kernel
def log_of_one_plus(x: float) -> float:
    """ln(1 + x) for x >= 0: n ln 2 + 2 artanh(f/(2 + f)) with 1 + x = 2^n (1 + f), sqrt(1/2) <= 1 + f < sqrt(2)."""
    bits = np.float64(1.0 + x).view(np.int64)
    n = np.int32((bits >> np.int64(MANTISSA_BITS)) - BIAS)
    m = np.int64((bits & np.int64(MANTISSA)) | np.int64(ONE)).view(np.float64)
    high = m > SQRT_2
    n = n + np.int32(1) if high else n
    m = 0.5 * m if high else m
    # Where n is 0 the sum 1 + x need not be formed, and no digit of a small x is lost.
    f = x if n == 0 else m - 1.0
    s = f / (2.0 + f)
    z = s * s
    p = 1.0 / 15.0 + z * (1.0 / 17.0 + z * (1.0 / 19.0 + z * (1.0 / 21.0 + z * (1.0 / 23.0))))
    p = 1.0 / 3.0 + z * (0.2 + z * (1.0 / 7.0 + z * (1.0 / 9.0 + z * (1.0 / 11.0 + z * (1.0 / 13.0 + z * p)))))
    # What is not finite stays so: the bits of no number are put together to a number above.
    return n * LN2 + 2.0 * s * (1.0 + z * p) + (x - x)


@kernel
def mean_of_decay(z: float) -> float:
    """(1 - exp(-z))/z = 1 - z/2! + z^2/3! ... for z >= 0, to round-off also at 0 (the series ends below 1e-18 at z = 1/2)."""
    x = min(z, SERIES_END)
    p = 1.0 / 479001600.0 - x * (1.0 / 6227020800.0 - x * (1.0 / 87178291200.0 - x * (1.0 / 1307674368000.0)))
    p = 1.0 / 362880.0 - x * (1.0 / 3628800.0 - x * (1.0 / 39916800.0 - x * p))
    p = 1.0 / 120.0 - x * (1.0 / 720.0 - x * (1.0 / 5040.0 - x * (1.0 / 40320.0 - x * p)))
    near = 1.0 - x * (0.5 - x * (1.0 / 6.0 - x * (1.0 / 24.0 - x * p)))
    far = (1.0 - decay(z)) / max(z, SERIES_END)
    return near if z <= SERIES_END else far


@kernel
def mean_of_dilution(x: float) -> float:
    """ln(1 + x)/x for x >= 0, to round-off also at 0 (the series ends below 1e-16 for x < 0.001)."""
    near = 1.0 - x * (0.5 - x * (1.0 / 3.0 - x * (0.25 - x * 0.2)))
    far = log_of_one_plus(x) / max(x, 1e-3)
    return near if x <= 1e-3 else far
