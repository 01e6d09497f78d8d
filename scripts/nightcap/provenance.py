"""Where a result comes from: versions, input, time. No name of a machine or a person."""

from __future__ import annotations

import hashlib
import platform
from collections.abc import Sequence
from datetime import UTC, datetime
from importlib.metadata import PackageNotFoundError, version
from pathlib import Path
from typing import Any

from nightcap import __version__

LIBRARIES = ("gmsh", "matplotlib", "numpy", "pydantic", "pyyaml", "scikit-fem", "scipy", "simpleeval")


def provenance(path: str, started: datetime, seconds: float) -> dict[str, Any]:
    """What produced a result, from which bytes and when.

    path : the case file; started : in UTC; seconds : from start to the finished result.
    """
    return {
        "nightcap": __version__,
        "libraries": {name: _version(name) for name in LIBRARIES},
        "python": platform.python_version(),
        "platform": f"{platform.system()} {platform.machine()}",
        "case_sha256": _sha256(path),
        "started": started.astimezone(UTC).isoformat(timespec="seconds"),
        "seconds": round(seconds, 3),
    }


def other_files(paths: Sequence[str]) -> dict[str, Any]:
    """From which bytes of other files a result comes; nothing if the case file names none."""
    return {"other_files_sha256": {Path(path).name: _sha256(path) for path in paths}} if paths else {}


def _version(name: str) -> str | None:
    try:
        return version(name)
    except PackageNotFoundError:
        return None


def _sha256(path: str) -> str | None:
    """None if the file cannot be read."""
    try:
        with open(path, "rb") as file:
            return hashlib.file_digest(file, "sha256").hexdigest()
    except OSError:
        return None
