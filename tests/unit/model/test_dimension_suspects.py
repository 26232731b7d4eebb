"""A clash names the known that it goes back to, where that can be told."""

from __future__ import annotations

import pytest

import eqsheet


def cure(text: str) -> str:
    clashes = [d for d in eqsheet.parse(text).solve().diagnostics if d.code.startswith("dimension-")]
    (found,) = clashes
    return found.help or ""


PRESSURE_DROP = "rho = 998 kg/m^2\nv = 2 m/s\ndp = rho*v^2/2\n"


@pytest.mark.parametrize(
    ("text", "said"),
    [
        (PRESSURE_DROP + "show dp in bar", "if `rho` on line 1 were a density (kg/m^3)"),
        (PRESSURE_DROP + "require dp <= 2 bar", "if `rho` on line 1 were a density (kg/m^3)"),
        (PRESSURE_DROP + "dp near 1 bar", "if `rho` on line 1 were a density (kg/m^3)"),
        (PRESSURE_DROP + "p = dp + 5 kPa\nshow dp in bar", "if `rho` on line 1 were a density (kg/m^3)"),
        (
            "F = 300 lb\nA = 4 in^2\nsigma = F/A\nrequire sigma <= 250 MPa",
            "if `F` on line 1 were a force (N)",
        ),
        # followed back through a line between
        (
            "D = 50 mm\nQ = 2 L\nA = pi*D^2/4\nv = Q/A\nrequire v <= 2.5 m/s",
            "if `Q` on line 2 were a volume flow (m^3/s)",
        ),
        # a plain number is demanded
        ("E = 50 kJ\nT = 300 K\nk = exp(-E/(const.R*T))", "if `E` on line 1 were a molar energy (J/mol)"),
    ],
)
def test_the_known_with_the_slip_is_named(text: str, said: str) -> None:
    assert said in cure(text)


def test_a_known_that_other_lines_confirm_is_no_suspect() -> None:
    """The mass flow takes the density as it stands, so the slip lies elsewhere."""
    confirmed = "m = rho*v*s*L\nm = 3 kg/s\ns = 1 m\nL = 2 m"
    assert "`rho`" not in cure("rho = 998 kg/m^3\nv = 2 m/s\ndp = rho*v\nshow dp in bar\n" + confirmed)


def test_a_term_of_a_sum_is_no_suspect_alone() -> None:
    """Made to fit the limit, `a` would no longer fit `b`."""
    assert "would fit if" not in cure("a = 2 m\nb = 3 m\nc = a + b\nrequire c <= 5 m^2")


def test_many_suspects_accuse_nobody() -> None:
    text = (
        "F = 10 kN\nL = 2 m\nI = 800 cm^3\nE = 210 GPa\nw = F*L^3/(48*E*I)\nshow w in mm\nrequire w <= L/300"
    )
    assert "would fit if" not in cure(text)
