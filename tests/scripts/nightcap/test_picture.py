import io
import math
import time
from collections.abc import Callable
from itertools import groupby

import numpy as np
import pytest
from numpy.testing import assert_allclose
from PIL import Image
from samples import foil_and_wire
from stand_ins import open_pair, screened_pair

from nightcap.geometry.build_layout import build_layout
from nightcap.geometry.case import Case
from nightcap.geometry.layout import Layout
from nightcap.outputs.drawing import Drawing, view_of
from nightcap.outputs.outlines import conductor_loops, strip_lines
from nightcap.outputs.picture import png
from nightcap.solver.solve import solve


def drawing(case: Case, layout: Layout) -> Drawing:
    solution = solve(layout, 1e-3)
    return Drawing(case, layout, solution.conductors, solution.potentials[:, 0], solution.fields)


@pytest.mark.parametrize("example", [open_pair, screened_pair])
def test_picture_shows_metal_lines_and_the_one_hue(example: Callable[[], tuple[Case, Layout]]) -> None:
    picture = drawing(*example())
    png(picture)  # the first one loads the library
    begin = time.perf_counter()
    content = png(picture)
    assert time.perf_counter() - begin < 3.0  # 1.5 s on a quiet machine
    pixels = np.asarray(Image.open(io.BytesIO(content)).convert("RGB")).astype(int)
    assert 500 < pixels.shape[1] < 1200
    metal = (np.abs(pixels - 158) < 4).all(axis=2).mean()
    blue = (np.abs(pixels - [0, 0x72, 0xB2]) < 12).all(axis=2).mean()
    assert metal > 0.01
    assert blue > 0.002


def test_a_strip_is_a_dark_line_with_its_name() -> None:
    case = foil_and_wire()
    layout = build_layout(case)
    assert not conductor_loops(layout, 0)
    assert_allclose(sum(math.dist(line[0], line[-1]) for line in strip_lines(layout, 0)), 0.7 + math.hypot(0.3, 0.2))
    assert len(conductor_loops(layout, 1)) == 1
    pixels = np.asarray(Image.open(io.BytesIO(png(drawing(case, layout)))).convert("L")).astype(int)
    dark = pixels < 60
    run = max((sum(1 for _ in group) for row in dark for value, group in groupby(row) if value), default=0)
    assert run > 0.25 * pixels.shape[1] * 0.7  # the level part takes up 0.35 of the shield's width


def test_view_of_open_space_leaves_a_margin_and_a_shield_fills_it() -> None:
    case, _ = open_pair()
    view = view_of(case)
    assert view.left < -2.5
    assert view.top > 1.0
    assert view.width < 10.0
    case, _ = screened_pair()
    assert 2.6e-3 < view_of(case).width < 3.2e-3


def test_outlines_of_conductors_close_on_themselves() -> None:
    _, layout = screened_pair()
    (loop,) = conductor_loops(layout, 1)
    np.testing.assert_allclose(np.hypot(loop[:, 0] - 0.6e-3, loop[:, 1]), 0.25e-3, rtol=1e-12)
    area = 0.5 * np.sum(loop[:, 0] * np.roll(loop[:, 1], -1) - np.roll(loop[:, 0], -1) * loop[:, 1])
    np.testing.assert_allclose(area, np.pi * 0.25e-3**2, rtol=2e-3)
