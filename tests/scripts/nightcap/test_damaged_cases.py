"""Damaged copies of the shipped cases end in messages and an exit code, never in a traceback."""

import random
from pathlib import Path

import pytest
from damage import damaged

from nightcap.command import main

FILES = sorted((Path(__file__).parents[3] / "cases").rglob("*.yaml"))
COPIES = 200
SEED = 20_261_201


@pytest.mark.parametrize("number", range(COPIES))
def test_check_survives(number: int, tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    rng = random.Random(SEED + number)  # noqa: S311 - damage, not secrets
    path = tmp_path / "damaged.yaml"
    path.write_text(damaged(rng.choice(FILES).read_text(), rng.randrange(2**30)))
    code = main(["check", str(path)])
    said = capsys.readouterr()
    assert code in (0, 1)
    assert (code == 0) == ("understood" in said.out)
    assert (code == 1) == (said.err.strip() != "")
    assert "internal error" not in said.err
    assert "Traceback" not in said.err
