"""Case files damaged at random: keys, values, structure and single characters."""

from __future__ import annotations

import random
from copy import deepcopy
from typing import Any

import yaml

WEIRD: tuple[Any, ...] = (
    None, True, False, 0, -1, 1e300, -1e300, 1e-300, float("inf"), float("nan"), 10**400, "", " ", "x", "0", "1 parsec",
    "1e400 mm", "pitch", "a*b", "2**2**2**2**9", "__import__('os')", "(((((", "\u202e", "\x85", "[1, 2]", "{}", [], {},
    [[]], [None], [[0, 0]], [[0, 0], [0, 0]], {"shape": "circle"}, {"kind": "open"}, {"like": "red"}, "A" * 5000,
)  # fmt: skip
"""Values that no key expects, or that some do."""


def damaged(text: str, seed: int) -> str:
    """A copy of a case file with one to four kinds of damage."""
    rng = random.Random(seed)  # noqa: S311 - damage, not secrets
    if rng.random() < 0.3:
        return _characters(text, rng)
    tree = yaml.safe_load(text)
    for _ in range(rng.randint(1, 4)):
        _hurt(tree, rng)
    return yaml.safe_dump(tree, allow_unicode=True, sort_keys=False)


def _characters(text: str, rng: random.Random) -> str:
    """Some characters dropped, doubled or replaced."""
    letters = list(text)
    for _ in range(rng.randint(1, 8)):
        k = rng.randrange(len(letters))
        letters[k] = rng.choice(["", letters[k] * 2, rng.choice(":{}[],-#&*!|>'\"%@`\t\n 0e.")])
    return "".join(letters)


def _hurt(tree: Any, rng: random.Random) -> None:
    """Changes one entry of one mapping or list somewhere in a tree."""
    places = list(_containers(tree))
    box = rng.choice(places)
    if not box:
        return
    key = rng.choice(list(box)) if isinstance(box, dict) else rng.randrange(len(box))
    match rng.randrange(6):
        case 0:
            del box[key]
        case 1:
            box[key] = deepcopy(rng.choice(WEIRD))
        case 2 if isinstance(box, dict):
            box[_misspelt(str(key), rng)] = box.pop(key)
        case 3:
            box[key] = deepcopy(rng.choice(places))
        case 4 if isinstance(box[key], int | float) and not isinstance(box[key], bool):
            box[key] = box[key] * rng.choice([-1, 0, 1e-9, 1e-3, 0.5, 1.5, 10, 1e6, 1e12])
        case _ if isinstance(box, list):
            box.append(box[key])
        case _:
            box[key] = [box[key]]


def _containers(tree: Any) -> Any:
    if isinstance(tree, dict | list):
        yield tree
        for value in list(tree.values() if isinstance(tree, dict) else tree):
            yield from _containers(value)


def _misspelt(word: str, rng: random.Random) -> str:
    k = rng.randrange(len(word) or 1)
    return rng.choice([word[:k] + word[k + 1 :], word + "s", word.upper(), word[:k] + "q" + word[k:]])
