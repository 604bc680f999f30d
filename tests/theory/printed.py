"""Comparison of a computed number with one printed to a given number of digits."""

from decimal import Decimal


def half_unit_of_last_digit(text: str) -> float:
    """Half a unit of the last digit printed in `text`, such as 5e-9 for "1.00e-6"."""
    exponent = Decimal(text).as_tuple().exponent
    assert isinstance(exponent, int), f"{text!r} is not a finite number"
    return float(Decimal((0, (5,), exponent - 1)))


def rounds_to(value: float, text: str) -> bool:
    """Whether `value`, rounded to the digits of `text`, is the number printed there.

    The tolerance is half a unit of the last printed digit, widened by a thousandth of it so that a
    number which falls on the edge is not decided by round-off.
    """
    return abs(float(value) - float(text)) <= 1.001 * half_unit_of_last_digit(text)
