"""Drawings of cases, right and wrong, before anything is solved."""

import re
from pathlib import Path

import numpy as np
import pytest
from numpy.testing import assert_allclose

from nightcap.command import main
from nightcap.geometry.build_layout import build_layout
from nightcap.geometry.case import Case
from nightcap.geometry.case_file import read_text
from nightcap.geometry.errors import CaseError
from nightcap.geometry.gaps import smallest_gap, surfaces
from nightcap.geometry.painting import paint
from nightcap.outputs.labels import Labels
from nightcap.outputs.measures import measures
from nightcap.outputs.outlines import points_along
from nightcap.outputs.sheet import loops_of, place_of_name

GOOD = """\
title: Two wires and a bar
units: mm
conductors:
  red: {shape: circle, diameter: 1, at: [-1, 0], coatings: [{thickness: 0.2, permittivity: 2.3}]}
  white: {shape: circle, diameter: 1, at: [1, 0], coatings: [{thickness: 0.3, permittivity: 2.3}]}
  bar: {shape: rectangle, width: 3, height: 0.4, at: [0, -1.5], rotate: 20}
boundary: {kind: shield, shape: circle, diameter: 8}
"""
WRONG = GOOD.replace("at: [1, 0]", "at: [-0.4, 0]").replace("at: [0, -1.5]", "at: [0, -3.9]")


def lengths(case: Case) -> dict[str, float]:
    return {measure.what: measure.length * 1e3 for measure in measures(case, paint(case))}


def test_measures_are_those_of_the_file() -> None:
    found = lengths(read_text(GOOD))
    assert_allclose(found["smallest figure, bar"], 0.4, rtol=1e-12)
    assert_allclose(found["thinnest coating, on red"], 0.2, rtol=1e-12)
    (gap,) = (what for what in found if what.startswith("narrowest gap"))
    assert gap.endswith("to bar")


@pytest.mark.parametrize("distance", [1.001, 1.5, 4.0])
def test_narrowest_gap_of_two_circles(distance: float) -> None:
    text = GOOD.replace("at: [-1, 0]", f"at: [{-distance / 2}, 0.3]").replace(
        "at: [1, 0]", f"at: [{distance / 2}, 0.3]"
    )
    case = read_text(re.sub(r", coatings: \[[^]]*\]", "", text))
    gap = smallest_gap(surfaces(case, paint(case)))
    assert gap is not None
    if gap.conductors == (0, 1):
        assert_allclose(gap.width * 1e3, distance - 1, rtol=1e-9)
        assert_allclose(np.array(gap.middle) * 1e3, [0, 0.3], atol=1e-4)
    else:
        assert gap.width * 1e3 < distance - 1


def test_a_single_conductor_has_no_gap() -> None:
    case = read_text(GOOD)
    alone = surfaces(case, paint(case))
    one = type(alone)(alone.curves[:4], alone.owner[:4])
    assert smallest_gap(one) is None


def test_mistakes_know_their_place() -> None:
    case = read_text(WRONG)
    with pytest.raises(CaseError) as caught:
        build_layout(case)
    places = {problem.key: problem.place for problem in caught.value.problems}
    x, y = places["conductors.white"] or (9.0, 9.0)
    assert -1e-3 < x < -0.4e-3
    assert abs(y) < 0.5e-3
    x, y = places["conductors.bar"] or (9.0, 9.0)
    assert np.hypot(x, y) > 3.5e-3


@pytest.mark.parametrize(("text", "good"), [(GOOD, True), (WRONG, False)])
def test_check_draws_both(text: str, good: bool, tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    (tmp_path / "pair.yaml").write_text(text)
    assert main(["check", str(tmp_path / "pair.yaml"), "--draw", str(tmp_path / "looks")]) == (0 if good else 1)
    folder = tmp_path / "looks" / "pair"
    assert (folder / "drawing.png").read_bytes().startswith(b"\x89PNG")
    svg = (folder / "drawing.svg").read_text()
    assert "Two wires and a bar" in svg
    assert ">red<" in svg
    assert ("overlaps conductor" in svg) is not good
    assert "drawing.svg" in capsys.readouterr().out


def test_an_unreadable_file_is_not_drawn(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    (tmp_path / "pair.yaml").write_text("conductors: 3\n")
    assert main(["check", str(tmp_path / "pair.yaml"), "--draw", str(tmp_path / "looks")]) == 1
    assert not (tmp_path / "looks").exists()
    assert "not drawn" in capsys.readouterr().out


def test_an_unwritable_folder_is_told(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    (tmp_path / "pair.yaml").write_text(GOOD)
    (tmp_path / "looks").write_text("a file")
    assert main(["check", str(tmp_path / "pair.yaml"), "--draw", str(tmp_path / "looks")]) == 1
    assert "could not be written" in capsys.readouterr().err


def test_outlines_fall_into_closed_loops() -> None:
    outline = read_text(GOOD).conductors[0].shape.outline()
    assert len(loops_of(outline)) == 1
    assert len(loops_of((*outline, *read_text(GOOD).conductors[1].shape.outline()))) == 2


@pytest.mark.parametrize(
    ("keys", "place"),
    [
        ("shape: rectangle, width: 3, height: 2, at: [1, 1]", (1, 1)),
        ("shape: ring, outer_radius: 2, inner_radius: 1", (-1.5, 0)),
        ("shape: bent_strip, points: [[-2, 2], [-2, 0], [2, 0], [2, 2]], thickness: 0.4", (-2, 0.9)),
        ("shape: strip, points: [[-3, 4], [-2, 0], [2, 0], [3, 4]]", (-2.5, 2)),
    ],
)
def test_names_stand_on_what_they_name(keys: str, place: tuple[float, float]) -> None:
    """On the middle of a figure; on its metal, level with the middle, where that is a hollow."""
    text = f"conductors: {{one: {{{keys}}}}}\nboundary: {{kind: ground_plane, at: -9}}\n"
    outline = read_text(text).conductors[0].shape.outline()
    curves = [points_along(curve) for curve in outline]
    assert_allclose(place_of_name(curves) * 1e3, place, atol=1e-3)


def test_labels_do_not_cover_each_other() -> None:
    from matplotlib.figure import Figure

    labels = Labels(Figure().add_subplot(), scale=1.0)
    written = [labels.put("name", np.zeros(2)) for _ in range(30)]
    assert written[0]
    assert not written[-1]
    boxes = labels.taken
    assert len(boxes) == sum(written) > 5
    assert all(
        a[2] <= b[0] or b[2] <= a[0] or a[3] <= b[1] or b[3] <= a[1] for k, a in enumerate(boxes) for b in boxes[:k]
    )


CASES = Path(__file__).parents[3] / "cases"


def test_every_shipped_case_can_be_drawn(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["check", str(CASES), "--draw", str(tmp_path)]) == 0
    assert "internal error" not in capsys.readouterr().err
    assert len(list(tmp_path.rglob("drawing.svg"))) == len(list(CASES.rglob("*.yaml")))
