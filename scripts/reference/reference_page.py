"""The reference of the case file: its hand-written text with every mark filled in."""

from __future__ import annotations

import inspect
import re
from collections import Counter
from collections.abc import Callable, Iterable
from pathlib import Path
from unicodedata import normalize

from case_examples import examples
from key_tables import table

from nightcap.geometry.case_file.boundaries import KEYS as BOUNDARIES
from nightcap.geometry.case_file.constructions import KEYS as CONSTRUCTIONS
from nightcap.geometry.case_file.constructions.groups import GroupKeys
from nightcap.geometry.case_file.expressions import CONSTANTS, FUNCTIONS
from nightcap.geometry.case_file.schema import Entry
from nightcap.geometry.case_file.shapes import ONLY_FOR, SHAPES
from nightcap.geometry.case_file.units import LENGTHS
from nightcap.geometry.materials import shipped
from nightcap.geometry.mixing import LAWS

TEMPLATE = Path(__file__).parent / "case_file.md"
MARK = re.compile(r"^\{\{(\w+)(?:: ([\w-]+))?\}\}$", re.MULTILINE)
"""A line of its own: ``{{shape: circle}}``, ``{{keys: LimitsEntry}}``, ``{{contents}}``."""
HEADING = re.compile(r"^(##|###) (.+)$", re.MULTILINE)
NOTE = "<!-- Written by scripts/document from scripts/reference/; change it there. -->"


class MarkError(Exception):
    """The template does not fit the program."""


def page() -> str:
    """The whole page. Raises MarkError for a mark that is not known, missing, or there twice."""
    template = TEMPLATE.read_text("utf-8")
    _check_marks(template)
    text = MARK.sub(lambda mark: MARKS[mark[1]](mark[2] or ""), template)
    return f"{NOTE}\n\n{text.replace('{contents}', _contents(text)).strip()}\n"


def _check_marks(template: str) -> None:
    """Every mark is known, and every shape, boundary, construction and example has exactly one."""
    count = Counter((kind, word) for kind, word in MARK.findall(template))
    unknown = sorted(f"{{{{{kind}: {word}}}}}" for kind, word in count if kind not in MARKS)
    if unknown:
        raise MarkError(f"{TEMPLATE.name}: no such mark: {', '.join(unknown)}")
    wanted = {("shape", word) for word in SHAPES} | {("boundary", word) for word in BOUNDARIES}
    wanted |= {("construction", word) for word in CONSTRUCTIONS}
    wanted |= {("example", name) for name in examples() if name.partition("-")[0] not in ("shape", *HEADED)}
    wrong = sorted(f"{{{{{kind}: {word}}}}}" for kind, word in wanted if count[kind, word] != 1)
    if wrong:
        raise MarkError(f"{TEMPLATE.name}: must hold exactly one of each of {', '.join(wrong)}")


def _shape(word: str) -> str:
    model = SHAPES[word]
    note = {"slab": "For dielectrics only.", "strip": "For conductors only."}.get(word, "")
    note = f"For {ONLY_FOR[word]} only." if word in ONLY_FOR else note
    return _headed("shape", word, model, note, table(model))


def _boundary(word: str) -> str:
    note = "Besides these it has `shape` and the keys of that [shape](#shapes)." if word == "shield" else ""
    return _headed("boundary", word, BOUNDARIES[word], "", table(BOUNDARIES[word]), note)


def _construction(word: str) -> str:
    model = CONSTRUCTIONS[word]
    is_group = issubclass(model, GroupKeys)
    rows = table(model, without=(GroupKeys,) if is_group else ())
    note = f"{'And the' if rows else 'It has the'} [keys of all groups](#groups-of-wires)." if is_group else ""
    return _headed("construction", word, model, "", rows, note)


HEADED = ("boundary", "construction")


def _headed(kind: str, word: str, model: type[Entry], *parts: str) -> str:
    """A heading, the model's own words, the example, then what follows."""
    found = examples().get(f"{kind}-{word}")
    if found is None:
        raise MarkError(f"examples/{kind}-{word}.yaml is missing")
    text = inspect.cleandoc(model.__doc__ or "").replace("``", "`")
    return "\n\n".join(part for part in (f"### {kind.capitalize()}: {word}", text, found.shown, *parts) if part)


def _keys(name: str) -> str:
    model = next((one for one in models() if one.__name__ == name), None)
    if model is None:
        raise MarkError(f"there is no model {name}")
    return table(model)


def models(base: type[Entry] = Entry) -> Iterable[type[Entry]]:
    """Every model of a case file, those without keys of their own included."""
    for model in base.__subclasses__():
        yield model
        yield from models(model)


def _example(name: str) -> str:
    if name not in examples():
        raise MarkError(f"examples/{name}.yaml is missing")
    return examples()[name].shown


def _functions(_: str) -> str:
    return f"Functions: {_quoted(FUNCTIONS)}; constants: {_quoted(CONSTANTS)}."


def _materials(_: str) -> str:
    catalogue = shipped()
    names = dict.fromkeys(one.name for one in catalogue.insulations.values())
    return f"Known: {_quoted(names)}."


def _metals(_: str) -> str:
    return f"Known: {_quoted(dict.fromkeys(one.name for one in shipped().metals.values()))}."


def _laws(_: str) -> str:
    """The mixing laws, in the words of the functions that are them."""
    rows = [f"| `{word}` | {' '.join((law.__doc__ or '').split())} |" for word, law in LAWS.items()]
    return "\n".join(["| law | what it stands for |", "|---|---|", *rows])


def _quoted(words: Iterable[str]) -> str:
    return ", ".join(f"`{word}`" for word in words)


def _contents(text: str) -> str:
    """The headings of the page as a list of links; those below the second level in one line each."""
    lines: list[str] = []
    for level, title in HEADING.findall(text):
        link = f"[{title.rpartition(': ')[2]}](#{anchor(title)})"
        if level == "##":
            lines.append(f"- {link}")
        else:
            lines[-1] += f"{': ' if lines[-1].count('](') == 1 else ', '}{link}"
    return "\n".join(lines)


def anchor(title: str) -> str:
    """The anchor that a heading gets on the usual renderers of Markdown."""
    return re.sub(r"[^\w\- ]", "", title.lower()).replace(" ", "-")


MARKS: dict[str, Callable[[str], str]] = {
    "shape": _shape,
    "boundary": _boundary,
    "construction": _construction,
    "keys": _keys,
    "example": _example,
    "contents": lambda _: "{contents}",
    "units": lambda _: _quoted(dict.fromkeys(normalize("NFKC", unit) for unit in LENGTHS)),
    "functions": _functions,
    "materials": _materials,
    "metals": _metals,
    "laws": _laws,
}
"""What a mark is replaced by."""
