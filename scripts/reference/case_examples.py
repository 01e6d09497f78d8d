"""The examples of the reference: small case files that are read, drawn and shown."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

from nightcap.geometry.case import Case
from nightcap.geometry.case_file import read_variants

FOLDER = Path(__file__).parent / "examples"


@dataclass(frozen=True)
class Example:
    """One example."""

    name: str
    """``shape-circle``, ``boundary-open``, ``construction-pair``, or the word of a topic."""
    text: str

    @property
    def case(self) -> Case:
        """What it says, in its first variant."""
        return read_variants(FOLDER / f"{self.name}.yaml")[0]

    @property
    def shown(self) -> str:
        """The picture, and the text beside it, in the reference."""
        picture = f'<img src="pictures/{self.name}.png" width="300" alt="{self.name.replace("-", " ")}">'
        return f"<table><tr><td>{picture}</td><td>\n\n```yaml\n{self.text.strip()}\n```\n\n</td></tr></table>"


def examples() -> dict[str, Example]:
    """All of them by name."""
    return {path.stem: Example(path.stem, path.read_text("utf-8")) for path in sorted(FOLDER.glob("*.yaml"))}
