"""What is written into the result folder of a case. A new output is a class here, and one line in OUTPUTS."""

from __future__ import annotations

from contextlib import suppress
from dataclasses import replace
from pathlib import Path
from typing import Protocol

from nightcap.geometry.errors import Problem
from nightcap.outputs.picture import Picture
from nightcap.outputs.result_csv import ResultCsv
from nightcap.outputs.result_json import ResultJson
from nightcap.result import FAILED, Result


class Output(Protocol):
    """One file of a result folder."""

    file: str
    """Its name in the folder."""
    is_essential: bool
    """Without it the case has failed; without another there is a warning."""

    def applies(self, result: Result) -> bool:
        """Whether there is anything to write."""

    def write(self, result: Result, folder: Path) -> None:
        """Writes the file, whole or not at all. Raises OSError."""


OUTPUTS: tuple[Output, ...] = (Picture(), ResultCsv(), ResultJson())
"""In the order of writing. result.json comes last: where it is, the folder is complete and of one piece."""


def write_outputs(result: Result, folder: Path, path: str, *, pictures: bool) -> Result:
    """Writes all that applies to a result; returns it with what went wrong. Never raises an Exception.

    path : the case file, for messages.
    """
    try:
        folder.mkdir(parents=True, exist_ok=True)
        clear_folder(folder)
    except OSError as error:
        return _unwritten(result, path, error)
    for output in OUTPUTS:
        if not output.applies(result) or (isinstance(output, Picture) and not pictures):
            continue
        try:
            output.write(result, folder)
        except Exception as error:  # numbers must not be lost because a picture cannot be drawn
            if output.is_essential:
                clear_folder(folder)
                return _unwritten(result, path, error)
            text = f"{output.file} was not written: {type(error).__name__}: {error}"
            result = replace(result, warnings=(*result.warnings, text))
    return result


def clear_folder(folder: Path) -> None:
    """Takes away what an earlier run left: first result.json, so that no folder ever mixes two runs."""
    for output in reversed(OUTPUTS):
        (folder / output.file).unlink(missing_ok=True)
        for draft in folder.glob(f".{output.file}.*.part"):
            with suppress(OSError):
                draft.unlink()


def _unwritten(result: Result, path: str, error: Exception) -> Result:
    problem = Problem(path, None, "", f"the result could not be written: {error}")
    return replace(result, status=FAILED, problems=(*result.problems, problem))
