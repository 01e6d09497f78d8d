"""The words of the command line. Imports nothing heavy: ``nightcap --help`` must answer at once."""

from __future__ import annotations

import argparse
import math
from pathlib import Path

import nightcap

TOP_EXAMPLES = """\
examples:
  nightcap check cases/                   read every case below cases/, no more
  nightcap run pair.yaml --out results    solve one case
  nightcap run cases/ --out results       solve every case below cases/

exit codes: 0 all cases met (check: can be solved), 1 some case was not met or
failed, 2 nothing could be run, 130 interrupted.
'nightcap run --help' and 'nightcap check --help' tell more.
"""
RUN_EXAMPLES = """\
examples:
  nightcap run pair.yaml --out results
      writes results/pair/result.json, result.csv and picture.png
  nightcap run cases/ --out results --jobs 4
      every *.yaml and *.yml below cases/, four at a time; cases/tail/pair.yaml
      goes to results/tail/pair/
  nightcap run cases/ --out quick --accuracy "1 %" --no-pictures
      a first look: a wider bracket than the files ask, numbers only
"""
CHECK_EXAMPLES = """\
examples:
  nightcap check pair.yaml      says what it understood, or every mistake with its line
  nightcap check cases/         the same for every *.yaml and *.yml below cases/
  nightcap check pair.yaml --draw looks
      and writes looks/pair/drawing.svg and drawing.png: the cross-section to
      scale, with names, dimensions and, where something is wrong, a mark
"""


MATERIALS_EXAMPLES = """\
examples:
  nightcap materials            all of them, with range, frequency and source
  nightcap materials PVC        those with this word in their name
  in a case file:   {thickness: 0.4, material: polyethylene, gas_fraction: 50 %}
                    {shape: circle, awg: 24, metal: tinned copper}
  of your own:      materials: {wax: {permittivity: 2.2, loss_tangent: 1e-3}}
                    materials: stock.materials.yaml      a file beside the case
"""
SCHEMA_EXAMPLES = """\
examples:
  nightcap schema > nightcap.schema.json
      and as the first line of a case file, for editors that speak the
      YAML language server protocol:
      # yaml-language-server: $schema=nightcap.schema.json
"""


def build_parser() -> argparse.ArgumentParser:
    """The parser of the whole command line."""
    parser = argparse.ArgumentParser(
        prog="nightcap",
        description=nightcap.__doc__,
        epilog=TOP_EXAMPLES,
        formatter_class=argparse.RawDescriptionHelpFormatter,
    )
    parser.add_argument("--version", action="version", version=f"nightcap {nightcap.__version__}")
    commands = parser.add_subparsers(dest="command", metavar="COMMAND", required=True)
    _add_run(commands)
    _add_check(commands)
    _add_materials(commands)
    commands.add_parser(
        "schema",
        help="print the JSON Schema of a case file, for editors",
        description="Prints the JSON Schema (draft 2020-12) of a case file, for completion and hover in an editor.",
        epilog=SCHEMA_EXAMPLES,
        formatter_class=argparse.RawDescriptionHelpFormatter,
    )
    return parser


def _add_run(commands: argparse._SubParsersAction[argparse.ArgumentParser]) -> None:
    run = commands.add_parser(
        "run",
        help="solve cases and write their results",
        description="Solves every case, each in a worker process of its own; one that fails never stops the others.",
        epilog=RUN_EXAMPLES,
        formatter_class=argparse.RawDescriptionHelpFormatter,
    )
    _add_paths(run)
    run.add_argument("--out", required=True, type=Path, metavar="DIR", help="folder that receives the results")
    run.add_argument(
        "--accuracy",
        type=accuracy,
        metavar="X",
        help="half-width of the bracket relative to sqrt(C_ii C_jj), for all cases instead of"
        " what their files ask: 1e-4 or '0.01 %%'",
    )
    run.add_argument("--jobs", type=count, metavar="N", help="cases solved at a time (default: one per processor)")
    run.add_argument("--no-pictures", action="store_true", help="do not draw picture.png")


def _add_check(commands: argparse._SubParsersAction[argparse.ArgumentParser]) -> None:
    check = commands.add_parser(
        "check",
        help="read cases and say what was understood, solve nothing",
        description="Reads every case and resolves its layout, prints what was understood, and solves nothing.",
        epilog=CHECK_EXAMPLES,
        formatter_class=argparse.RawDescriptionHelpFormatter,
    )
    _add_paths(check)
    check.add_argument("--draw", type=Path, metavar="DIR", help="folder that receives a drawing of each case")


def _add_materials(commands: argparse._SubParsersAction[argparse.ArgumentParser]) -> None:
    materials = commands.add_parser(
        "materials",
        help="list the materials that a case file may name",
        description="Lists insulations and metals with their values and where these come from.",
        epilog=MATERIALS_EXAMPLES,
        formatter_class=argparse.RawDescriptionHelpFormatter,
    )
    materials.add_argument(
        "word", nargs="?", default="", metavar="WORD", help="only those with this word in their name"
    )
    materials.add_argument("--json", action="store_true", help="as JSON, with everything that is known of each")


def _add_paths(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("paths", nargs="+", metavar="PATH", help="case file, or folder searched for *.yaml and *.yml")


def accuracy(text: str) -> float:
    """A fraction from 1e-9 to 0.5, as in a case file, written as such or in per cent."""
    number = text.strip()
    scale = 1.0
    if number.endswith("%"):
        number, scale = number[:-1], 0.01
    try:
        value = float(number) * scale
    except ValueError:
        value = math.nan
    if not 1e-9 <= value <= 0.5:
        raise argparse.ArgumentTypeError(f"{text!r} is not between 1e-9 and 0.5 (examples: 1e-4, '0.01 %')")
    return value


def count(text: str) -> int:
    """A whole number, at least 1."""
    if not text.isascii() or not text.isdigit() or int(text) < 1:
        raise argparse.ArgumentTypeError(f"{text!r} is not a whole number of at least 1")
    return int(text)
