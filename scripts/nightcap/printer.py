"""Lines for the person who waits: results on standard output, mistakes on standard error."""

from __future__ import annotations

import os
import sys
from collections.abc import Iterable
from contextlib import suppress
from typing import TextIO


def show(lines: Iterable[str]) -> None:
    """Lines on standard output."""
    _write(sys.stdout, lines)


def complain(lines: Iterable[str]) -> None:
    """Lines on standard error."""
    _write(sys.stderr, lines)


def _write(stream: TextIO, lines: Iterable[str]) -> None:
    """A reader that goes away (``| head``), or a full disk, must not stop the work: further lines go nowhere."""
    text = "".join(f"{line}\n" for line in lines)
    try:
        stream.write(text.encode(stream.encoding or "utf-8", "replace").decode(stream.encoding or "utf-8"))
        stream.flush()
    except OSError as error:
        if not isinstance(error, BrokenPipeError):
            _tell_the_other(stream, error)
        nowhere = os.open(os.devnull, os.O_WRONLY)
        os.dup2(nowhere, stream.fileno())
        os.close(nowhere)


def _tell_the_other(stream: TextIO, error: OSError) -> None:
    """Says on the other stream, if it can, that this one takes no more lines."""
    other = sys.stderr if stream is sys.stdout else sys.stdout
    with suppress(OSError):
        print(f"nightcap: no more lines here: {error.strerror or error}; work goes on", file=other, flush=True)
