"""Limits over a family that read a curve outside its range are told once, with the members."""

from __future__ import annotations

import eqsheet

TEXT = """\
curve h(Q in L/s) in m:
    0 20
    10 12
for i in 1..40:
    Q[i] = i*0.5 L/s
    require h(Q[i]) >= 3 m
"""


def test_members_are_folded() -> None:
    (found,) = [d for d in eqsheet.parse(TEXT).solve().diagnostics if d.code == "outside-curve"]
    assert found.notes[0] == "this is about `Q[21]`"
    assert "`Q[22]`" in found.notes[1]
