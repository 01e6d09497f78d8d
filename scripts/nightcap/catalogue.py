"""``nightcap materials``: the materials that a case file may name."""

from __future__ import annotations

import json
from collections.abc import Iterable, Iterator
from dataclasses import asdict
from textwrap import wrap
from typing import TypeVar

from nightcap.geometry.materials import Insulation, Metal, Quantity, shipped
from nightcap.printer import complain, show

WIDTH = 80
Known = TypeVar("Known", Insulation, Metal)
CAUTION = (
    "Breakdown strengths are short-time values of thin samples in the laboratory, no design values. For insulation,"
    " earthing and voltage follow the standards that apply, local codes and licensed practice."
)
LEGEND = (
    "Sources: found, read in public text; memory, not looked up again. Insulations differ from batch to batch, with"
    " temperature, moisture and frequency: for a design take the maker's figures. Values near 20 degrees Celsius."
)


def list_materials(word: str = "", *, as_json: bool = False) -> bool:
    """Shows all materials, or those whose name or alias holds a word; False if there is none."""
    catalogue = shipped()
    insulations = _matching(catalogue.insulations.values(), word)
    metals = _matching(catalogue.metals.values(), word)
    if not insulations and not metals:
        complain([f"nightcap: no material has {word!r} in its name"])
        return False
    show([_document(insulations, metals)] if as_json else _lines(insulations, metals))
    return True


def _matching(known: Iterable[Known], word: str) -> list[Known]:
    return [material for material in dict.fromkeys(known) if word.lower() in _words(material)]


def _words(material: Insulation | Metal) -> str:
    return " ".join((material.name, *material.aliases)).lower()


def _document(insulations: list[Insulation], metals: list[Metal]) -> str:
    tree = {
        "insulations": [asdict(one) for one in insulations],
        "metals": [asdict(one) for one in metals],
        "units": {"frequency": "Hz", "breakdown": "kV/mm", "conductivity": "S/m"},
        "caution": CAUTION,
    }
    return json.dumps(tree, indent=1, ensure_ascii=False)


def _lines(insulations: list[Insulation], metals: list[Metal]) -> Iterator[str]:
    if insulations:
        yield f"{'insulation':24}{'eps_r':>8}{'range':>17}{'tan delta':>11}{'at':>8}{'kV/mm':>12}"
        for insulation in insulations:
            yield from _insulation(insulation)
        yield ""
        yield from wrap(CAUTION, WIDTH)
    if metals:
        yield from ([""] if insulations else [])
        yield f"{'metal':24}{'S/m':>10}{'range':>24}"
        for metal in metals:
            conductivity = metal.conductivity
            spread = _spread(conductivity.range)
            yield f"{metal.name:24}{conductivity.value:>10.4g}{spread:>24}".rstrip()
            yield from _remarks(metal, {"": conductivity})
    yield ""
    yield from wrap(LEGEND, WIDTH)


def _insulation(one: Insulation) -> Iterator[str]:
    loss, strength = one.loss_tangent, one.breakdown
    tangent = f"{loss.value:g}" if loss else ""
    at = _hertz(loss.frequency) if loss and loss.frequency else ""
    low_high = _spread(strength.range or (strength.value, strength.value)) if strength else ""
    spread = _spread(one.permittivity.range)
    yield f"{one.name:24}{one.permittivity.value:>8g}{spread:>17}{tangent:>11}{at:>8}{low_high:>12}".rstrip()
    yield from _remarks(one, {"eps_r": one.permittivity, "tan delta": loss, "kV/mm": strength})


def _remarks(one: Insulation | Metal, properties: dict[str, Quantity | None]) -> Iterator[str]:
    """Other names, and the notes and source of every value, indented."""
    if one.aliases:
        yield from _indented(f"also: {', '.join(one.aliases)}")
    for head, quantity in properties.items():
        if quantity:
            lead = f"{head}: " if head else ""
            note = f" ({quantity.note})" if quantity.note else ""
            yield from _indented(f"{lead}{quantity.source}{note}")


def _indented(text: str) -> list[str]:
    return wrap(text, WIDTH, initial_indent="    ", subsequent_indent="      ")


def _hertz(frequency: float) -> str:
    for scale, unit in ((1e9, "GHz"), (1e6, "MHz"), (1e3, "kHz")):
        if frequency >= scale:
            return f"{frequency / scale:g} {unit}"
    return f"{frequency:g} Hz"


def _spread(low_high: tuple[float, float] | None) -> str:
    if low_high is None:
        return ""
    low, high = low_high
    return f"{low:.4g}" if low == high else f"{low:g} to {high:g}"
