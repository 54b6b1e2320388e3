"""Three decisions in time: one that resolves, one that does not, and the next."""

from __future__ import annotations

from dataclasses import dataclass
from html import escape

from behavgen.model import Cell

__all__ = ["Wave", "draw_timing", "timing_words", "waves"]

_EDGES = ((40.0, 120.0), (180.0, 260.0), (320.0, 390.0))
"""Decision and reset edge of each decision."""
_PHASES = ("decides 1", "unresolved", "decides 0")
_DELAY, _RESET, _END = 36.0, 20.0, 420.0
_LEFT, _ROW, _SWING = 74.0, 40.0, 20.0
_TOP = 34.0
_SLANT = 3.0

_LEVEL = {"high": "1", "low": "0", "mid": "m"}
_UNRESOLVED = {"x": "x", "coin": "c", "hold": "h"}


@dataclass(frozen=True, slots=True, kw_only=True)
class Wave:
    """One signal: from each time on a level.

    Levels are ``1``, ``0``, ``m`` (mid), ``x`` (unknown) and ``c`` (a coin's result).
    """

    name: str
    steps: tuple[tuple[float, str], ...]


def waves(cell: Cell) -> tuple[Wave, ...]:
    """Return the signals that the cell has, in the order of the drawing."""
    pins = cell.pins
    found = [
        Wave(name=pins.clk, steps=_clock(cell)),
        Wave(name=pins.outp, steps=_output(cell, "1")),
    ]
    if pins.outn:
        found.append(Wave(name=pins.outn, steps=_output(cell, "0")))
    if pins.unresolved:
        rise, fall = _EDGES[1][1], _EDGES[2][0] + _DELAY
        found.append(Wave(name=pins.unresolved, steps=((0.0, "0"), (rise, "1"), (fall, "0"))))
    return tuple(found)


def timing_words(cell: Cell) -> str:
    """Say in words what the drawing shows."""
    pins = cell.pins
    subject = f"{pins.outp} and {pins.outn}" if pins.outn else pins.outp
    rests = {
        "high": _agreeing(subject, pins.outn, "rest high"),
        "low": _agreeing(subject, pins.outn, "rest low"),
        "mid": _agreeing(subject, pins.outn, "rest at mid level (X on logic pins)"),
        "hold": _agreeing(subject, pins.outn, "hold the last decision"),
    }[cell.in_reset]
    ends = {
        "x": _agreeing(subject, pins.outn, "go X"),
        "coin": _agreeing(subject, pins.outn, "show the result of a coin"),
        "hold": _agreeing(subject, pins.outn, "keep their value"),
    }[cell.when_unresolved]
    until = "until the next ready" if cell.in_reset == "hold" else "until the reset state returns"
    flag = f", and {pins.unresolved} rises until the next ready" if pins.unresolved else ""
    return (
        f"Each {cell.decides_on} edge of {pins.clk} decides. In reset {rests}. A decision that is "
        f"not ready by the end of its phase is unresolved: then {ends} {until}{flag}. Not to scale."
    )


def _agreeing(subject: str, other: str | None, words: str) -> str:
    """Join a subject and a verb phrase in the plural, or in the singular for a lone output."""
    if other:
        return f"{subject} {words}"
    verb, _, rest = words.partition(" ")
    verb += "es" if verb == "go" else "s"
    return f"{subject} {verb} {rest.replace('their', 'its')}"


def draw_timing(cell: Cell) -> str:
    """Return the timing sketch as one ``<svg>`` element."""
    rows = waves(cell)
    height = _TOP + _ROW * len(rows)
    bottom = height - 10.0
    drawn = "".join(_draw_wave(wave, _TOP + _ROW * i) for i, wave in enumerate(rows))
    return (
        f'<svg class="sketch" viewBox="0 0 500 {height:g}" role="img" '
        'aria-labelledby="timing-t timing-d"><title id="timing-t">Decisions in time</title>'
        f'<desc id="timing-d">{escape(timing_words(cell))}</desc>'
        f"{_guides(bottom)}{drawn}</svg>"
    )


def _clock(cell: Cell) -> tuple[tuple[float, str], ...]:
    active, idle = ("1", "0") if cell.decides_on == "rising" else ("0", "1")
    steps = [(0.0, idle)]
    for decide, reset in _EDGES:
        steps += [(decide, active), (reset, idle)]
    return tuple(steps)


def _output(cell: Cell, bit: str) -> tuple[tuple[float, str], ...]:
    """Return an output's levels: a one, an unresolved decision, and a zero."""
    other = "0" if bit == "1" else "1"
    rest = _LEVEL.get(cell.in_reset)
    (_, reset_1), (_, reset_2), (decide_3, reset_3) = _EDGES
    steps = [(0.0, rest or "x"), (_EDGES[0][0] + _DELAY, bit)]
    if rest:
        steps.append((reset_1 + _RESET, rest))
    shown = _UNRESOLVED[cell.when_unresolved]
    if shown != "h":
        steps.append((reset_2, shown))
    if rest:
        steps.append((reset_2 + _RESET, rest))
    steps.append((decide_3 + _DELAY, other))
    if rest:
        steps.append((reset_3 + _RESET, rest))
    return tuple(steps)


def _guides(bottom: float) -> str:
    """Draw decision edges, the phases' names and the two delays."""
    lines = "".join(f"M{_LEFT + decide:g} 26V{bottom:g}" for decide, _ in _EDGES)
    names = "".join(
        f'<text class="note" x="{_LEFT + 0.5 * (decide + reset):g}" y="10">{name}</text>'
        f'<path class="thin" d="M{_LEFT + decide:g} 15H{_LEFT + reset:g}"/>'
        for name, (decide, reset) in zip(_PHASES, _EDGES, strict=True)
    )
    start = _LEFT + _EDGES[0][0]
    delay = f'<path class="measure" d="M{start:g} 71h{_DELAY:g}m-4-3l4 3-4 3"/>'
    return f'<path class="guide" d="{lines}"/>{names}{delay}' + (
        f'<text class="note" x="{start + 0.5 * _DELAY:g}" y="67">delay</text>'
    )


def _draw_wave(wave: Wave, top: float) -> str:
    squeeze = ' textLength="64" lengthAdjust="spacingAndGlyphs"' if len(wave.name) > 9 else ""
    label = (
        f'<text class="pin end" x="{_LEFT - 6:g}" y="{top + 16:g}"{squeeze}>'
        f"{escape(wave.name)}</text>"
    )
    ends = [time for time, _ in wave.steps[1:]] + [_END]
    line, areas = [], []
    previous = ""
    for (start, level), end in zip(wave.steps, ends, strict=True):
        x, width = _LEFT + start, end - start
        if level in "xc":
            areas.append(_unknown(x, width, top, level))
            previous = ""
            continue
        y = top + {"1": 2.0, "0": 2.0 + _SWING, "m": 2.0 + 0.5 * _SWING}[level]
        line.append(f"L{x + _SLANT:g} {y:g}" if previous else f"M{x:g} {y:g}")
        line.append(f"H{x + width:g}")
        previous = level
    return f'{label}{"".join(areas)}<path class="wave" d="{"".join(line)}"/>'


def _unknown(x: float, width: float, top: float, level: str) -> str:
    """Draw a stretch in which the level is unknown (hatched) or a coin's (plain, with a letter)."""
    low, high = top + 2.0, top + 2.0 + _SWING
    area = f'<path class="unknown" d="M{x:g} {low:g}h{width:g}V{high:g}h{-width:g}z"/>'
    if level == "c":
        return area + f'<text class="note" x="{x + 0.5 * width:g}" y="{top + 16:g}">?</text>'
    strokes = []
    offset = 0.0
    while offset < width - 1.0:
        reach = min(7.0, width - offset)
        strokes.append(f"M{x + offset:g} {high:g}l{reach:g} {-_SWING * reach / 7.0:g}")
        offset += 7.0
    return area + f'<path class="hatch" d="{"".join(strokes)}"/>'
