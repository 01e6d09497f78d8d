"""Every case file that ships is read, solved and compared; a new file needs no new test code."""

from pathlib import Path

import numpy as np
import pytest

from nightcap.geometry.build_layout import build_layout
from nightcap.geometry.case import Case
from nightcap.geometry.case_file import read_case, read_variants
from nightcap.solver.solve import solve

CASES = Path(__file__).parents[2] / "cases"
FILES = sorted(CASES.rglob("*.yaml"))


@pytest.mark.parametrize("path", FILES, ids=lambda path: path.relative_to(CASES).with_suffix("").as_posix())
def test_shipped_case(path: Path) -> None:
    for case in read_variants(path):
        check(case)


def check(case: Case) -> None:
    floating = tuple(conductor.name for conductor in case.conductors if conductor.floating)
    solution = solve(build_layout(case), case.accuracy, case.limits, floating, case.ties)
    assert solution.status == "met", solution.reason
    bracket = solution.bracket
    assert bracket.relative <= case.accuracy
    root = np.sqrt(np.diag(bracket.value))
    off_diagonal = bracket.value - np.diag(np.diag(bracket.value))
    assert (off_diagonal <= bracket.half_width).all()
    if case.expect:
        expected = np.array(case.expect.capacitance)
        assert (np.abs(bracket.value - expected) <= case.expect.tolerance * np.outer(root, root)).all()
        if case.expect.exact:
            rounding = 1e-12 * np.outer(root, root)
            assert (np.abs(bracket.value - expected) <= bracket.half_width + rounding).all()
            for gap in (expected - bracket.lower, bracket.upper - expected):
                assert np.linalg.eigvalsh(gap / np.outer(root, root))[0] >= -1e-12


def test_the_shipped_cases_are_there_and_the_published_ones_name_their_source() -> None:
    demo = [path for path in FILES if path.parent.name == "tide-gauge"]
    published = [path for path in FILES if path.parent.name == "published"]
    assert len(demo) >= 8
    assert len(published) >= 20
    for path in published:
        expect = read_case(path).expect
        assert expect is not None
        assert len(expect.source) > 5
