"""A step as a sweep over bands of rows, so that what it computes on the way stays in the processor's cache.

Every kernel works on the rows ``first`` to ``end`` - 1 of the compute arrays.  What is needed only for a few rows lives in
*belts*, arrays (B, nx+4) with B a power of two in which row j lies at place j mod B: a sweep northward needs no more of the
rows behind it.  A belt with at least as many places as there are rows holds them all.
"""

from oceanbox.compiling import kernel

__all__ = ["place", "window"]


@kernel
def place(j: int, belt_rows: int) -> int:
    """Where row ``j`` lies in a belt of ``belt_rows`` places, a power of two, or in an array of all rows, of any number."""
    return j if j < belt_rows else j & (belt_rows - 1)


@kernel
def window(band: int, height: int, behind: int, first: int, end: int) -> tuple[int, int]:
    """The rows among ``first`` to ``end`` - 1 of a term that follows ``behind`` rows behind a band of ``height`` rows."""
    return max(first, band - behind), min(end, band + height - behind)
