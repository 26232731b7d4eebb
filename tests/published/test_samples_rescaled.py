"""Every sample with each quantity rescaled by random powers of ten up to 1e6 either way: the same results."""

from __future__ import annotations

import pytest
from sample_scales import SAMPLES, factors_of, in_other_scales

import eqsheet
from eqsheet.diagnostics.source import Source
from eqsheet.worksheet.sheet import read

PATHS = sorted(SAMPLES.glob("*.eqsheet"))


@pytest.mark.parametrize("seed", [1, 2])
@pytest.mark.parametrize("path", PATHS, ids=[p.stem for p in PATHS])
def test_a_sample_does_not_depend_on_the_scale_of_its_quantities(path, seed) -> None:
    text = path.read_text(encoding="utf-8")
    solution = eqsheet.load(path).solve()
    factors = factors_of(text, solution, seed)
    assert len(factors) >= 3
    again = _solved_beside(in_other_scales(text, factors), path)
    assert again.status == solution.status, [d.message for d in again.diagnostics]
    for name, value in solution.items():
        scale = 10.0 ** factors.get(name.partition("[")[0], 0)
        assert again[name].si * scale == pytest.approx(value.si, rel=1e-10, abs=value.error), name
    before = {tuple(sorted(b.unknowns)): b.iterations for b in solution.blocks if len(b.unknowns) > 1}
    for block in again.blocks:
        if len(block.unknowns) > 1:
            assert abs(block.iterations - before[tuple(sorted(block.unknowns))]) <= 1


def _solved_beside(text: str, path) -> eqsheet.Solution:
    """The solution of a text with the files that stand beside the sample."""
    return read(Source(str(path), text)).solve()
