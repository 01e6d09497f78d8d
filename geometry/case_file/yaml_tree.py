"""YAML text into plain data, safely, with the line of every key.

Scalars are resolved as in the YAML 1.2 core schema: 'on', 'yes' or 1:30 are text, 1e-4 is a number.
"""

from __future__ import annotations

import math
import re
from dataclasses import dataclass, field

import yaml

from nightcap.geometry.case_file.problems import Problems, under

Tree = bool | int | float | str | list["Tree"] | dict[str, "Tree"] | None
MOST_VALUES = 20_000
"""Values in one file, aliases counted as often as they are used."""
DEEPEST = 40
INTEGER = re.compile(r"[-+]?[0-9]+")
FLOAT = re.compile(r"[-+]?(\.[0-9]+|[0-9]+(\.[0-9]*)?)([eE][-+]?[0-9]+)?")
WORDS: dict[str, bool | None] = {"": None, "~": None, "null": None, "true": True, "false": False}
PLAIN_TAGS = ("str", "int", "float", "bool", "null", "seq", "map", "timestamp", "merge", "value")


class UnreadableError(Exception):
    """The text is no usable YAML; nothing more can be said about the file. Internal to this package."""

    def __init__(self, line: int | None, text: str) -> None:
        super().__init__(text)
        self.line = line
        self.text = text


def compose(text: str) -> yaml.Node | None:
    """The nodes of a single YAML document, or None for an empty one. Raises UnreadableError."""
    try:
        return yaml.compose(text, Loader=yaml.SafeLoader)
    except yaml.reader.ReaderError as error:
        said = f"is not text: character {error.character!r} at position {error.position}"
        raise UnreadableError(None, said) from error
    except yaml.MarkedYAMLError as error:
        mark = error.problem_mark or error.context_mark
        said = " ".join(str(part) for part in (error.context, error.problem) if part)
        raise UnreadableError(mark.line + 1 if mark else None, f"is not valid YAML: {said}") from error
    except RecursionError as error:
        raise UnreadableError(None, "is nested too deeply") from error


@dataclass
class Planter:
    """Turns nodes into a tree, noting lines and mistakes on the way."""

    lines: dict[str, int]
    problems: Problems
    count: int = 0
    above: list[yaml.Node] = field(default_factory=list)

    def tree(self, node: yaml.Node, path: str = "") -> Tree:
        """Plain data. Raises UnreadableError for aliases that multiply or turn in circles."""
        line = node.start_mark.line + 1
        self.lines.setdefault(path, line)
        self.count += 1
        if self.count > MOST_VALUES:
            raise UnreadableError(line, f"holds more than {MOST_VALUES} values, aliases included")
        if any(node is one for one in self.above):
            raise UnreadableError(line, "holds an alias that contains itself")
        if len(self.above) > DEEPEST:
            raise UnreadableError(line, f"is nested more than {DEEPEST} levels deep")
        tag = node.tag.rpartition(":")[2]
        if not node.tag.startswith("tag:yaml.org,2002:") or tag not in PLAIN_TAGS:
            self.problems.add(path, f"the tag '{node.tag}' is not allowed; write the plain value")
            return None
        self.above.append(node)
        try:
            return self._value(node, path)
        finally:
            self.above.pop()

    def _value(self, node: yaml.Node, path: str) -> Tree:
        if isinstance(node, yaml.SequenceNode):
            return [self.tree(item, under(path, k)) for k, item in enumerate(node.value)]
        if isinstance(node, yaml.MappingNode):
            return self._mapping(node, path)
        plain = isinstance(node, yaml.ScalarNode) and node.style is None
        return _scalar(node.value) if plain else str(node.value)

    def _mapping(self, node: yaml.MappingNode, path: str) -> dict[str, Tree]:
        tree: dict[str, Tree] = {}
        for key_node, value_node in node.value:
            if not isinstance(key_node, yaml.ScalarNode):
                raise UnreadableError(key_node.start_mark.line + 1, "has a key that is not a word")
            key = key_node.value
            place = under(path, key)
            if key in tree:
                first = self.lines[place]
                self.lines[place] = key_node.start_mark.line + 1
                self.problems.add(place, f"is given twice, first in line {first}")
                continue
            self.lines[place] = key_node.start_mark.line + 1
            tree[key] = self.tree(value_node, place)
        return tree


def _scalar(text: str) -> Tree:
    if text.lower() in WORDS:
        return WORDS[text.lower()]
    if INTEGER.fullmatch(text) and len(text) < 300:
        return int(text)
    if FLOAT.fullmatch(text):
        value = float(text)
        return value if math.isfinite(value) else text
    return text
