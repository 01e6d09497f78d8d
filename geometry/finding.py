"""A geometric mistake before it is told."""

from __future__ import annotations

from dataclasses import dataclass, field

from nightcap.geometry.curves import Point


@dataclass(frozen=True)
class Finding:
    """Who is in conflict with whom, and where."""

    pair: tuple[str, str]
    key: str
    """Whom to blame: key path in the case file."""
    text: str
    place: Point | None = field(default=None, compare=False)
    """In the cross-section, m."""
