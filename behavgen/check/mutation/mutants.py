"""Mutants: one mechanical change each of an emitted SystemVerilog text.

A check that lets one through does not look there. Every coefficient, constant,
operator, comparison, clock step and condition is changed in turn, every
statement left out, the pins and the process codes swapped. Comments, strings
and compiler directives stay as they are, and so do declared widths.
"""

from __future__ import annotations

import re
from collections.abc import Callable, Iterator
from dataclasses import dataclass, replace
from itertools import chain

__all__ = ["Mutant", "mutants_of"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Mutant:
    """One change of a text.

    Parameters
    ----------
    kind : str
        What was done, in words.
    line : int
        Counted from 1.
    start, end : int
        Characters of the text that are replaced.
    was, becomes : str
    """

    kind: str
    line: int
    start: int
    end: int
    was: str
    becomes: str

    @property
    def words(self) -> str:
        """The change in one line."""
        change = (
            f"{self.was!r} becomes {self.becomes!r}" if self.becomes else f"without {self.was!r}"
        )
        return f"line {self.line}, {self.kind}: {change}"

    def applied_to(self, text: str) -> str:
        """Return the changed text."""
        return text[: self.start] + self.becomes + text[self.end :]


def mutants_of(
    text: str, *, inputs: tuple[str, str], outputs: tuple[str, ...]
) -> tuple[Mutant, ...]:
    """Return every mutant of a text, in the order of the text.

    Parameters
    ----------
    text : str
        SystemVerilog as emitted.
    inputs : (str, str)
        Names of the differential input's pins.
    outputs : tuple of str
        Names of the output pins; swapped if there are two.
    """
    code = _without_words(text)
    swaps = [inputs, outputs] if len(outputs) == 2 else [inputs]
    found = chain(
        _replaced(code, "constant", _REAL, _one_percent),
        _replaced(code, "constant", _SIZED, _another_sized),
        _replaced(code, "constant", _INTEGER, _another_integer),
        _replaced(code, "operator", _OPERATOR, _OPERATORS.__getitem__),
        _replaced(code, "comparison", _COMPARISON, _COMPARISONS.__getitem__),
        _replaced(code, "negation", _NEGATION, lambda _: ("",)),
        _replaced(code, "edge", _STEP, lambda step: (f"2'b{step[4]}{step[3]}",)),
        _replaced(code, "edge", _EDGE, lambda word: (_EDGES[word],)),
        _conditions(code),
        _left_out(code),
        *(_swapped_pins(code, pins) for pins in swaps),
        _swapped_processes(code),
    )  # fmt: skip
    told = (replace(one, was=text[one.start : one.end]) for one in found)
    return tuple(sorted(told, key=lambda mutant: (mutant.start, mutant.end, mutant.becomes)))


_WORDS = re.compile(
    r"//[^\n]*|\"(?:\\.|[^\"\\])*\"|^[ ]*`[^\n]*|\[\d+:0\](?= *[A-Za-z_])", re.MULTILINE
)
_REAL = re.compile(r"(?<![\w.'])\d+\.\d+(?:e[+-]?\d+)?(?![\w.])|(?<![\w.'])\d+e[+-]?\d+(?![\w.])")
_SIZED = re.compile(r"\d+'s?[hd][0-9a-f_]+|1'b[01]")
_INTEGER = re.compile(r"(?<![\w.'])\d+(?![\w.']|: begin| *:)")
_OPERATOR = re.compile(r"(?<=[\w)}] )(?:[-+*/^%]|>>|<<|&&|\|\|)(?= )")
_COMPARISON = re.compile(r"(?<= )(?:===|!==|==|!=|<=|>=|<|>)(?= )")
_NEGATION = re.compile(r"!(?=[\w(])|(?<=[(=?:] )-(?=[a-z(])|(?<=\()-(?=[a-z(])")
_STEP = re.compile(r"2'b(?:01|10)\b")
_EDGE = re.compile(r"\b(?:posedge|negedge)\b")

_OPERATORS = {
    "+": ("-",), "-": ("+",), "*": ("/",), "/": ("*",), "%": ("/",), "^": ("|",),
    ">>": ("<<",), "<<": (">>",), "&&": ("||",), "||": ("&&",),
}  # fmt: skip
_COMPARISONS = {
    "<": ("<=", ">="), ">": (">=", "<="), "<=": ("<", ">"), ">=": (">", "<"),
    "==": ("!=",), "!=": ("==",), "===": ("!==",), "!==": ("===",),
}  # fmt: skip
_EDGES = {"posedge": "negedge", "negedge": "posedge"}


def _without_words(text: str) -> str:
    """Return the text with comments, strings, directives and widths blanked, length kept."""
    return _WORDS.sub(lambda found: re.sub(r"[^\n]", " ", found[0]), text)


def _mutant(code: str, kind: str, start: int, was: str, becomes: str) -> Mutant:
    line = code.count("\n", 0, start) + 1
    return Mutant(kind=kind, line=line, start=start, end=start + len(was), was=was, becomes=becomes)


def _replaced(
    code: str, kind: str, token: re.Pattern[str], changed: Callable[[str], tuple[str, ...]]
) -> Iterator[Mutant]:
    for found in token.finditer(code):
        for becomes in changed(found[0]):
            yield _mutant(code, kind, found.start(), found[0], becomes)


def _one_percent(literal: str) -> tuple[str, ...]:
    """Return a real constant larger and smaller by 1 %; of zero, one."""
    value = float(literal)
    if value == 0.0:
        return ("1.0",)
    return tuple(_real(share * value) for share in (1.01, 0.99))


def _real(value: float) -> str:
    digits = f"{value:.15g}"
    return digits if re.search(r"[.e]", digits) else f"{digits}.0"


def _another_sized(literal: str) -> tuple[str, ...]:
    """Return a sized constant with its lowest bit the other way."""
    size, base, digits = re.match(r"(\d+)'(s?[hdb])(\w+)", literal).groups()  # type: ignore[union-attr]
    radix = {"h": 16, "d": 10, "b": 2}[base[-1]]
    other = int(digits.replace("_", ""), radix) ^ 1
    return (f"{size}'{base}{other:{'x' if radix == 16 else 'b' if radix == 2 else 'd'}}",)


def _another_integer(literal: str) -> tuple[str, ...]:
    return (str(int(literal) + 1),)


def _conditions(code: str) -> Iterator[Mutant]:
    """Take every branch always, and never."""
    for found in re.finditer(r"\b(?:if|while) \(|\bwait \(", code):
        start = found.end() - 1
        condition = code[start : _closing(code, start)]
        for constant in ("(1'b1)", "(1'b0)"):
            if found[0].startswith("wait") and constant == "(1'b1)":
                continue  # it would spin without time passing
            yield _mutant(code, "condition", start, condition, constant)


def _closing(code: str, opening: int) -> int:
    """Return where the parenthesis that opens here has been closed."""
    depth = 0
    for place in range(opening, len(code)):
        depth += {"(": 1, ")": -1}.get(code[place], 0)
        if depth == 0:
            return place + 1
    return len(code)


_STATEMENT = re.compile(
    r"^ *(?:[\w']+: )?(?:if \(.*\) |else )?(?P<what>(?:\{[\w, ]+\}|[a-z]\w*(?:\[\w+\])?) = [^;]*;"
    r"|[a-z]\w*(?:\([^;]*\))?;(?! *//))",
    re.MULTILINE,
)
_KEPT = re.compile(r"^(?:end\w*|begin|initial|always)\b")


def _left_out(code: str) -> Iterator[Mutant]:
    """Leave out every statement: what it sets stays as it was."""
    for found in re.finditer(_STATEMENT, code):
        if not _KEPT.match(found["what"]):
            yield _mutant(code, "statement", found.start("what"), found["what"], ";")


def _swapped_pins(code: str, pins: tuple[str, ...]) -> Iterator[Mutant]:
    """Exchange a pin for its counterpart wherever it is used."""
    body = code.find(");\n")
    for pin, other in (pins, pins[::-1]):
        for found in re.finditer(rf"\b{re.escape(pin)}\b", code[body:]):
            yield _mutant(code, "pin", body + found.start(), pin, other)


def _swapped_processes(code: str) -> Iterator[Mutant]:
    """Give each process the code of the next."""
    task = re.search(r"task select_process;.*?endtask", code, re.DOTALL)
    labels = list(re.finditer(r"^ +(\d+):", task[0], re.MULTILINE)) if task else []
    for label in labels:
        others = [one[1] for one in labels if one[1] != label[1]]
        start = task.start() + label.start(1) if task else 0
        yield from (_mutant(code, "process code", start, label[1], other) for other in others[:1])
