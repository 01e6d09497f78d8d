"""What README.md shows is what the program does."""

import re
from pathlib import Path

import pytest
import yaml

from nightcap.command import main
from nightcap.geometry.build_layout import build_layout
from nightcap.geometry.case_file import read_variants

ROOT = Path(__file__).parents[2]
README = (ROOT / "README.md").read_text("utf-8")
CASES = re.findall(r"```yaml\n(.*?)```", README, flags=re.DOTALL)
PAIR = ROOT / "cases" / "tide-gauge" / "screened-pair.yaml"
NUMBER = re.compile(r"(-?\d+)\.(\d+)\((\d+)\)")


def numbers(text: str) -> list[tuple[float, float]]:
    """Values and half-widths, printed as 28.90173(29)."""
    return [(float(f"{a}.{b}"), int(w) * 10.0 ** -len(b)) for a, b, w in NUMBER.findall(text)]


def test_the_first_case_is_the_shipped_one() -> None:
    assert yaml.safe_load(CASES[0]) == yaml.safe_load(PAIR.read_text("utf-8"))


@pytest.mark.parametrize("number", range(len(CASES)))
def test_every_case_can_be_read(number: int, tmp_path: Path) -> None:
    (tmp_path / "case.yaml").write_text(CASES[number], "utf-8")
    for case in read_variants(tmp_path / "case.yaml"):
        build_layout(case)


def test_the_printed_output_is_that_of_the_program(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["run", str(PAIR), "--out", str(tmp_path / "results"), "--no-pictures"]) == 0
    said = numbers(capsys.readouterr().out)
    shown = numbers(re.findall(r"```\n\$ scripts/run run (.*?)```", README, flags=re.DOTALL)[0])
    assert len(said) == len(shown) == 9
    for (value, width), (printed, printed_width) in zip(said, shown, strict=True):
        assert abs(value - printed) <= width + printed_width
        assert printed_width < 2 * width


def test_links_lead_somewhere() -> None:
    text = README + (ROOT / "DEVELOPERS.md").read_text("utf-8")
    links = [link for link in re.findall(r"\]\(([^)#]+)\)", text) if "//" not in link]
    assert len(links) >= 4
    assert [link for link in links if not (ROOT / link).exists()] == []
