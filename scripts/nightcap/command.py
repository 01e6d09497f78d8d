"""The command ``nightcap``: the one place where an exit code is decided."""

from __future__ import annotations

from argparse import Namespace
from collections.abc import Callable, Sequence
from enum import IntEnum

from nightcap.arguments import build_parser
from nightcap.geometry.errors import UsageError
from nightcap.printer import complain, show


class ExitCode(IntEnum):
    """What the caller of the command learns."""

    ALL_MET = 0
    SOME_NOT_MET = 1
    """Some case is not met, failed, or not as expected."""
    NOTHING_RUN = 2
    """A wrong command line or an unreadable path."""
    INTERRUPTED = 130


def main(arguments: Sequence[str] | None = None) -> int:
    """Runs one command line, by default that of the process; returns the exit code."""
    options = build_parser().parse_args(arguments)  # leaves with NOTHING_RUN by itself if the words are wrong
    try:
        return ExitCode.ALL_MET if COMMANDS[options.command](options) else ExitCode.SOME_NOT_MET
    except UsageError as error:
        complain([f"nightcap: {error}"])
        return ExitCode.NOTHING_RUN
    except KeyboardInterrupt:
        complain(["nightcap: interrupted; finished cases have their results"])
        return ExitCode.INTERRUPTED


def _run(options: Namespace) -> bool:
    from nightcap.run import run

    return run(options.paths, options.out, options.accuracy, processes=options.jobs, pictures=not options.no_pictures)


def _check(options: Namespace) -> bool:
    from nightcap.check import check

    return check(options.paths, options.draw)


def _materials(options: Namespace) -> bool:
    from nightcap.catalogue import list_materials

    return list_materials(options.word, as_json=options.json)


def _schema(_: Namespace) -> bool:
    from json import dumps

    from nightcap.geometry.case_file.json_schema import case_schema

    show([dumps(case_schema(), indent=1, ensure_ascii=False)])
    return True


COMMANDS: dict[str, Callable[[Namespace], bool]] = {
    "run": _run,
    "check": _check,
    "materials": _materials,
    "schema": _schema,
}
