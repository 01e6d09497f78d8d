"""Lines for the person who waits: results on standard output, mistakes on standard error."""

from __future__ import annotations

import os
import sys
from collections.abc import Iterable
from typing import TextIO


def show(lines: Iterable[str]) -> None:
    """Lines on standard output."""
    _write(sys.stdout, lines)


def complain(lines: Iterable[str]) -> None:
    """Lines on standard error."""
    _write(sys.stderr, lines)


def _write(stream: TextIO, lines: Iterable[str]) -> None:
    """A reader that goes away (``| head``) must not stop the work: from then on the lines go nowhere."""
    text = "".join(f"{line}\n" for line in lines)
    try:
        stream.write(text.encode(stream.encoding or "utf-8", "replace").decode(stream.encoding or "utf-8"))
        stream.flush()
    except BrokenPipeError:
        nowhere = os.open(os.devnull, os.O_WRONLY)
        os.dup2(nowhere, stream.fileno())
        os.close(nowhere)
