"""Files that are written whole or not at all."""

from __future__ import annotations

import os
from collections.abc import Iterator
from contextlib import contextmanager, suppress
from pathlib import Path
from typing import BinaryIO


@contextmanager
def whole_file(path: Path) -> Iterator[BinaryIO]:
    """A file to write, which takes its name only once all of it is safely on the disk.

    On any failure the file that had the name before stays as it was. Raises OSError.
    """
    draft = path.with_name(f".{path.name}.{os.getpid()}.part")
    try:
        with draft.open("wb") as file:
            yield file
            file.flush()
            os.fsync(file.fileno())
        draft.replace(path)
    except BaseException:
        with suppress(OSError):
            draft.unlink()
        raise
    _sync_folder(path.parent)


def write_whole(path: Path, content: bytes) -> None:
    """Writes a file whole or not at all."""
    with whole_file(path) as file:
        file.write(content)


def _sync_folder(folder: Path) -> None:
    """Makes a change of name last through a power cut, where the system can sync a folder."""
    with suppress(OSError, AttributeError):
        handle = os.open(folder, os.O_RDONLY | os.O_DIRECTORY)
        try:
            os.fsync(handle)
        finally:
            os.close(handle)
