"""Face values of a field that is carried by a flow: flux-limited, no new extremum.

Koren (1993), in Numerical Methods for Advection-Diffusion Problems, Vieweg, 117-138: the limiter
phi(r) = max(0, min(2 r, (1 + 2 r)/3, 2)) lies in the region of Sweby (1984, SIAM J. Num. Anal. 21, 995).
"""

from oceanbox.compiling import kernel

__all__ = ["limited_face_value"]

# A product where the compiler may not turn a quotient into one.
THIRD = 1.0 / 3.0


@kernel
def limited_face_value(far: float, upstream: float, downstream: float, courant: float) -> float:
    """Value on a face from the cell upstream, the one behind it (``far``) and the one downstream.

    upstream + (1 - courant)/2 phi(r) (downstream - upstream), r = (upstream - far)/(downstream - upstream).
    ``courant`` is the share of the upstream cell that leaves through the face in a step, 0 for the instantaneous value.
    The limiter is written without the division by the downstream difference.
    """
    behind = upstream - far
    ahead = downstream - upstream
    sign = 1.0 if ahead > 0.0 else -1.0
    third = sign * (ahead + 2.0 * behind) * THIRD
    slope = sign * max(0.0, min(min(2.0 * sign * behind, third), 2.0 * sign * ahead))
    return upstream + 0.5 * (1.0 - courant) * slope
