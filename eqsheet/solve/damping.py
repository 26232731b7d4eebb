"""The damping of Newton's step, decided from norms alone: the same for arrays and for plain floats.

References
----------
P. Deuflhard, Newton Methods for Nonlinear Problems: Affine Invariance and Adaptive Algorithms, Springer
2004, section 3.3.3, algorithm NLEQ-ERR, prediction and correction of the damping factor.
"""

from __future__ import annotations

from math import inf

# Smallest damping tried: below it a step changes no more than the rounding of the residuals does.
LEAST_DAMPING = 2.0**-30
# Contraction of the corrections by a full step that needs no further look at the damping.
SURE_CONTRACTION = 0.25
# An estimate this many times the damping in use is tried once before the step is taken.
WORTH_RAISING = 4.0


def predicted_damping(
    last: float, last_norm: float, correction: float, deviation: float, norm: float
) -> float:
    """Damping to begin with, from how well the last Jacobian foretold this step.

    Parameters
    ----------
    last : float
        Damping of the last step.
    last_norm, correction, deviation, norm : float
        Norms, all in the weights of now, of the last full step, of the simplified correction after it, of that
        correction less the step of now, and of the step of now.
    """
    apart = deviation * norm
    if apart <= 0.0:
        return 1.0
    return min(1.0, max(last * last_norm * correction / apart, LEAST_DAMPING))


def corrected_damping(
    damping: float, contraction: float, deviation: float, norm: float, cut: bool, raised: bool
) -> float:
    """The damping to try instead of one that has been tried; the same one where its step is accepted.

    Parameters
    ----------
    damping : float
    contraction : float
        Norm of the simplified correction relative to that of the step.
    deviation : float
        Norm of what the simplified correction differs by from what a linear system would leave of the step as taken.
    norm : float
        Norm of the full step.
    cut : bool
        The step was cut at bounds.
    raised : bool
        The damping has been raised for this step before.
    """
    estimate = 0.5 * norm * damping * damping / deviation if deviation > 0.0 else inf
    if not contraction < 1.0:
        return min(estimate, 0.5 * damping)
    better = min(1.0, estimate)
    if not (cut or raised) and better >= WORTH_RAISING * damping:
        return better
    return damping
