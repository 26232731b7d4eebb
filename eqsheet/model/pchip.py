"""Slopes of monotone cubic interpolation, and the cubics between points of given values and slopes.

Slopes after Fritsch and Carlson (Monotone piecewise cubic interpolation, SIAM J. Numer. Anal. 17, 1980,
238-246): a cubic between two points is monotone where both its slopes lie between 0 and three times the slope
of the chord. The weighted harmonic mean taken here, as PCHIP does, stays inside that, and is 0 where the data
turn.
"""

from __future__ import annotations

from collections.abc import Sequence

Cubic = tuple[float, float, float, float]


def monotone_slopes(x: Sequence[float], y: Sequence[float]) -> list[float]:
    """Slope at each point.

    Parameters
    ----------
    x, y : sequence of float
        At least two points, x strictly increasing.

    >>> monotone_slopes([0.0, 1.0, 2.0], [0.0, 1.0, 2.0])
    [1.0, 1.0, 1.0]
    >>> monotone_slopes([0.0, 1.0, 2.0], [0.0, 1.0, 0.0])[1]
    0.0
    """
    widths = [b - a for a, b in zip(x, x[1:])]
    chords = [(b - a) / width for a, b, width in zip(y, y[1:], widths)]
    if len(chords) == 1:
        return [chords[0], chords[0]]
    first = _end_slope(widths[0], widths[1], chords[0], chords[1])
    last = _end_slope(widths[-1], widths[-2], chords[-1], chords[-2])
    inner = [
        _mean_slope(*widths_here, *chords_here)
        for widths_here, chords_here in zip(zip(widths, widths[1:]), zip(chords, chords[1:]))
    ]
    return [first, *inner, last]


def _mean_slope(before: float, after: float, chord_before: float, chord_after: float) -> float:
    """Weighted harmonic mean of the slopes of two neighbouring chords; 0 where they differ in sign."""
    if not (chord_before > 0.0 < chord_after or chord_before < 0.0 > chord_after):
        return 0.0
    a, b = 2.0 * after + before, after + 2.0 * before
    return (a + b) / (a / chord_before + b / chord_after)


def _end_slope(own: float, next_width: float, chord: float, next_chord: float) -> float:
    """Slope of the parabola through the last three points, kept within what is monotone."""
    slope = ((2.0 * own + next_width) * chord - own * next_chord) / (own + next_width)
    if slope * chord <= 0.0:
        return 0.0
    if chord * next_chord <= 0.0 and abs(slope) > 3.0 * abs(chord):
        return 3.0 * chord
    return slope


def cubic(width: float, y0: float, y1: float, slope0: float, slope1: float) -> Cubic:
    """Coefficients c of c0 + c1*s + c2*s^2 + c3*s^3, s from 0 to `width`, from values and slopes at the ends.

    >>> cubic(1.0, 0.0, 1.0, 0.0, 0.0)
    (0.0, 0.0, 3.0, -2.0)
    """
    chord = (y1 - y0) / width
    return (
        y0,
        slope0,
        (3.0 * chord - 2.0 * slope0 - slope1) / width,
        (slope0 + slope1 - 2.0 * chord) / (width * width),
    )
