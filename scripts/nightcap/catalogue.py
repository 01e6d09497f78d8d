"""``nightcap materials``: the materials that a case file may name."""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from textwrap import wrap
from typing import TypeVar

from nightcap.geometry.materials import Insulation, Metal, shipped
from nightcap.printer import complain, show

WIDTH = 80
Known = TypeVar("Known", Insulation, Metal)
CAUTION = (
    "Breakdown strengths are short-time values of thin samples in the laboratory, no design values. For insulation,"
    " earthing and voltage follow the standards that apply, local codes and licensed practice."
)


def list_materials(word: str = "") -> bool:
    """Shows all materials, or those whose name, alias or source holds a word; False if there is none."""
    catalogue = shipped()
    insulations = _matching(dict.fromkeys(catalogue.insulations.values()), word)
    metals = _matching(dict.fromkeys(catalogue.metals.values()), word)
    if not insulations and not metals:
        complain([f"nightcap: no material has {word!r} in its name or source"])
        return False
    show(_lines(insulations, metals))
    return True


def _matching(known: Iterable[Known], word: str) -> list[Known]:
    return [material for material in known if word.lower() in _words(material)]


def _words(material: Insulation | Metal) -> str:
    return " ".join((material.name, *material.aliases, material.source)).lower()


def _lines(insulations: list[Insulation], metals: list[Metal]) -> Iterator[str]:
    if insulations:
        yield f"{'insulation':21}{'eps_r':>7}{'range':>17}{'tan delta':>12}{'at':>9}{'kV/mm':>12}"
        for insulation in insulations:
            yield from _insulation(insulation)
        yield ""
        yield from wrap(CAUTION, WIDTH)
    if metals:
        yield from ([""] if insulations else [])
        yield f"{'metal':24}{'S/m':>12}"
        for metal in metals:
            yield f"{metal.name:24}{metal.conductivity:>12.4g}"
            yield from _remarks(metal)


def _insulation(one: Insulation) -> Iterator[str]:
    at = f"{one.loss_tangent.frequency:g} Hz" if one.loss_tangent.frequency else ""
    tangent = "" if one.loss_tangent.value is None else f"{one.loss_tangent.value:g}"
    spread = _spread(one.permittivity_range)
    strength = _spread(one.breakdown.range)
    yield f"{one.name:21}{one.permittivity:>7g}{spread:>17}{tangent:>12}{at:>9}{strength:>12}"
    yield from _remarks(one)


def _remarks(one: Insulation | Metal) -> Iterator[str]:
    """Other names and the source, indented."""
    also = f"also: {', '.join(one.aliases)}. " if one.aliases else ""
    yield from wrap(f"{also}{one.source}", WIDTH, initial_indent="    ", subsequent_indent="    ")


def _spread(low_high: tuple[float, float] | None) -> str:
    if low_high is None:
        return ""
    low, high = low_high
    return f"{low:g}" if low == high else f"{low:g} to {high:g}"
