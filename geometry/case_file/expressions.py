"""Arithmetic in case files: parsed once, held against a short list of what is allowed, evaluated in floating point.

What comes in is foreign text, so the list is of what may stand in an expression, not of what may not, and all numbers
are floats from the start: no integer can grow without end.
"""

from __future__ import annotations

import ast
import math
import operator
import re
import warnings
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from functools import lru_cache

from simpleeval import SimpleEval

from nightcap.geometry.case_file.problems import listed, nearest
from nightcap.geometry.case_file.units import LENGTHS

LONGEST_TEXT = 300
"""Characters of one expression."""
CONSTANTS = {"pi": math.pi}
MANY = 30


def _round(value: float, digits: float = 0.0) -> float:
    if not (abs(digits) <= 300 and digits.is_integer()):
        raise ValueError("not a whole number of digits")
    return float(round(value, int(digits)))


FUNCTIONS: dict[str, tuple[Callable[..., float], int, int]] = {
    "sqrt": (math.sqrt, 1, 1),
    "sin": (math.sin, 1, 1),
    "cos": (math.cos, 1, 1),
    "tan": (math.tan, 1, 1),
    "asin": (math.asin, 1, 1),
    "acos": (math.acos, 1, 1),
    "atan": (math.atan, 1, 1),
    "atan2": (math.atan2, 2, 2),
    "exp": (math.exp, 1, 1),
    "log": (math.log, 1, 1),
    "log10": (math.log10, 1, 1),
    "abs": (abs, 1, 1),
    "min": (min, 2, MANY),
    "max": (max, 2, MANY),
    "hypot": (math.hypot, 2, MANY),
    "radians": (math.radians, 1, 1),
    "degrees": (math.degrees, 1, 1),
    "round": (_round, 1, 2),
    "floor": (lambda value: float(math.floor(value)), 1, 1),
    "ceil": (lambda value: float(math.ceil(value)), 1, 1),
}
"""Name to function, least and greatest number of arguments. Angles are in radians, log is the natural logarithm."""
KEEP_UNITS = ("abs", "min", "max", "hypot")
"""Functions whose value is a length if their arguments are."""
OPERATORS: dict[type[ast.AST], Callable[..., float]] = {
    ast.Add: operator.add,
    ast.Sub: operator.sub,
    ast.Mult: operator.mul,
    ast.Div: operator.truediv,
    ast.Pow: math.pow,
    ast.USub: operator.neg,
    ast.UAdd: operator.pos,
}
ALLOWED = (ast.BinOp, ast.UnaryOp, ast.Call, ast.Name, ast.Load, ast.Constant, *OPERATORS)
MEASURE = re.compile(
    r"(?<![\w.])((?:\.[0-9]+|[0-9]+(?:\.[0-9]*)?)(?:[eE][-+]?[0-9]+)?)\s*"
    rf"({'|'.join(sorted(LENGTHS, key=len, reverse=True))})(?!\w)"
)
"""A number with a unit of length."""
LEADING_UNDERSCORE = re.compile(r"(?<!\w)_")


@dataclass(frozen=True)
class Formula:
    """An expression that may be evaluated."""

    text: str
    node: ast.expr
    names: tuple[str, ...]
    """Parameters that it needs."""
    measures: Mapping[str, float]
    """Lengths written with a unit, under the names that stand for them in ``node``, in the file's unit."""
    terms: frozenset[str]
    """Names that stand as plain summands, possibly times numbers: they are lengths if the whole is one."""

    @property
    def is_length(self) -> bool:
        """Whether a summand is written with a unit of length."""
        return any(name in self.measures for name in self.terms)

    def evaluate(self, values: Mapping[str, float]) -> float:
        """The value with these parameters. Raises ValueError with the reason if there is none."""
        names = {**CONSTANTS, **self.measures, **{name: values[name] for name in self.names}}
        try:
            result = float(_evaluator(names).eval(self.text, self.node))
        except ZeroDivisionError:
            raise ValueError(f"{_short(self.text)} divides by zero{self._with(values)}") from None
        except OverflowError:
            raise ValueError(f"{_short(self.text)} is too large{self._with(values)}") from None
        except RecursionError:
            raise ValueError(f"{_short(self.text)} is nested too deeply") from None
        except ValueError:
            raise ValueError(f"{_short(self.text)} has no real value{self._with(values)}") from None
        if not math.isfinite(result):
            raise ValueError(f"{_short(self.text)} is too large{self._with(values)}")
        return result

    def _with(self, values: Mapping[str, float]) -> str:
        said = listed(f"{name} = {values[name]:.6g}" for name in self.names)
        return f" where {said}" if said else ""


@lru_cache(maxsize=10_000)
def formula(text: str, unit: float) -> Formula:
    """The expression in a text; ``unit`` is that of the file, m. Raises ValueError with the reason if it is none."""
    if len(text) > LONGEST_TEXT:
        raise ValueError(f"it has more than {LONGEST_TEXT} characters")
    if LEADING_UNDERSCORE.search(text):
        raise ValueError("a name starts with a letter")
    measures: dict[str, float] = {}

    def named(match: re.Match[str]) -> str:
        name = f"_{len(measures)}"
        measures[name] = float(match[1]) * (LENGTHS[match[2]] / unit)
        return name

    plain = MEASURE.sub(named, " ".join(text.split()))
    node = _parsed(plain)
    names = tuple(dict.fromkeys(_checked_names(node)))
    wanted = tuple(name for name in names if name not in measures and name not in CONSTANTS)
    return Formula(text, node, wanted, measures, _terms(node) - CONSTANTS.keys())


def _parsed(text: str) -> ast.expr:
    if not text.isascii():
        odd = next(letter for letter in text if not letter.isascii())
        raise ValueError(f"the character {odd!r} cannot stand in a formula")
    try:
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")  # about style of Python, which this is not
            return ast.parse(text, mode="eval").body
    except (SyntaxError, ValueError):
        raise ValueError(f"it cannot be understood{_hint(text)}") from None
    except (MemoryError, RecursionError):
        raise ValueError("it is nested too deeply") from None


def _hint(text: str) -> str:
    if text.count("(") != text.count(")"):
        return ": a bracket is missing; in a list in brackets, put a formula with commas in quotes"
    return "; use ** for powers" if "^" in text else ""


def _checked_names(node: ast.expr) -> list[str]:
    """Every name in an expression that holds nothing but what is allowed."""
    names, called = [], set()
    for part in ast.walk(node):
        if isinstance(part, ast.BinOp) and isinstance(part.op, ast.BitXor):
            raise ValueError("use ** for powers")
        if not isinstance(part, ALLOWED):
            raise ValueError("only names, numbers, + - * / **, brackets and functions can stand in a formula")
        if isinstance(part, ast.Constant):
            part.value = _number(part.value)
        elif isinstance(part, ast.Call):
            called.add(_checked_call(part))
        elif isinstance(part, ast.Name):
            names.append(part)
    for name in names:
        if name.id in FUNCTIONS and name not in called:
            raise ValueError(f"the function {name.id} needs brackets, {name.id}(...)")
    return [name.id for name in names if name not in called]


def _number(value: object) -> float:
    if isinstance(value, bool) or not isinstance(value, int | float):
        raise ValueError(f"{value!r} is not a number")
    try:
        number = float(value)
    except OverflowError:
        number = math.inf
    if not math.isfinite(number):
        raise ValueError("a number in it is too large")
    return number


def _checked_call(call: ast.Call) -> ast.Name:
    if not isinstance(call.func, ast.Name) or call.func.id not in FUNCTIONS:
        name = call.func.id if isinstance(call.func, ast.Name) else ""
        said = f"there is no function {name!r}" if name and name[0] != "_" else "only a function can stand before ("
        raise ValueError(f"{said}; allowed: {listed(FUNCTIONS)}{nearest(name, FUNCTIONS)}")
    _, least, most = FUNCTIONS[call.func.id]
    if call.keywords or not least <= len(call.args) <= most:
        count = str(least) if least == most else f"{least} to {most}"
        raise ValueError(
            f"{call.func.id} takes {count} {'number' if count == '1' else 'numbers'}, not {len(call.args)}"
        )
    return call.func


def _terms(node: ast.expr) -> frozenset[str]:
    """Names that are summands of an expression, possibly times numbers."""
    if isinstance(node, ast.Name):
        return frozenset({node.id})
    if isinstance(node, ast.UnaryOp):
        return _terms(node.operand)
    if isinstance(node, ast.Call) and isinstance(node.func, ast.Name) and node.func.id in KEEP_UNITS:
        return frozenset().union(*map(_terms, node.args))
    return _terms_of_pair(node) if isinstance(node, ast.BinOp) else frozenset()


def _terms_of_pair(node: ast.BinOp) -> frozenset[str]:
    if isinstance(node.op, ast.Add | ast.Sub):
        return _terms(node.left) | _terms(node.right)
    if isinstance(node.op, ast.Mult | ast.Div) and _is_plain(node.right):
        return _terms(node.left)
    if isinstance(node.op, ast.Mult) and _is_plain(node.left):
        return _terms(node.right)
    return frozenset()


def _is_plain(node: ast.expr) -> bool:
    """Whether an expression holds no parameter and no length."""
    return all(n.id in FUNCTIONS or n.id in CONSTANTS for n in ast.walk(node) if isinstance(n, ast.Name))


def _evaluator(names: Mapping[str, float]) -> SimpleEval:
    EVALUATOR.names = names
    return EVALUATOR


EVALUATOR = SimpleEval(operators=OPERATORS, functions={name: f for name, (f, _, _) in FUNCTIONS.items()}, names={})


def _short(text: str) -> str:
    return repr(text if len(text) <= 60 else f"{text[:57]}...")
