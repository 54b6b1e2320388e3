"""The cell as a block: its own pins around a comparator."""

from __future__ import annotations

from html import escape

from behavgen.model import Cell

__all__ = ["draw_symbol"]

_WIDTH, _HEIGHT = 300.0, 190.0
_LEFT, _RIGHT, _TOP, _BOTTOM = 96.0, 204.0, 32.0, 158.0
_CLOCK_Y, _ENABLE_Y = 129.0, 148.0
_LONGEST = 9
"""Longer pin names are squeezed."""


def draw_symbol(cell: Cell) -> str:
    """Return the block symbol as one ``<svg>`` element."""
    pins = cell.pins
    description = (
        f"Inputs {pins.inp} and {pins.inn}, clock {pins.clk} deciding on its {cell.decides_on} "
        f"edge, output {pins.outp}"
    )
    parts = (_body(), _inputs(cell), _outputs(cell), _supplies(cell))
    return (
        f'<svg class="sketch" viewBox="0 0 {_WIDTH:g} {_HEIGHT:g}" role="img" '
        f'aria-labelledby="symbol-t symbol-d"><title id="symbol-t">Pins of {escape(cell.name)}'
        f'</title><desc id="symbol-d">{escape(description)}</desc>{"".join(parts)}</svg>'
    )


def _body() -> str:
    triangle = "M122 52L178 84L122 116z"
    regenerates = "M134 92h9v-17h9"  # a step: the comparator's answer is one of two levels
    box = f'<rect class="block" x="{_LEFT:g}" y="{_TOP:g}" width="108" height="126" rx="3"/>'
    return f'{box}<path class="block" d="{triangle}"/><path class="thin" d="{regenerates}"/>'


def _inputs(cell: Cell) -> str:
    pins = cell.pins
    text = _left_pin(pins.inp, 64.0) + _left_pin(pins.inn, 104.0)
    text += '<text class="sign" x="109" y="68">+</text>'
    text += '<text class="sign" x="109" y="108">&#8722;</text>'
    text += _clock(cell)
    return text + (_left_pin(pins.enable, _ENABLE_Y) if pins.enable else "")


def _clock(cell: Cell) -> str:
    """Draw the edge-triggered clock input; a circle says that the falling edge decides."""
    falling = cell.decides_on == "falling"
    wedge = f"M{_LEFT:g} {_CLOCK_Y - 6:g}l9 6-9 6"
    end = _LEFT - 8.0 if falling else _LEFT
    text = _left_pin(cell.pins.clk, _CLOCK_Y, end=end) + f'<path class="thin" d="{wedge}"/>'
    if falling:
        text += f'<circle class="block" cx="{_LEFT - 4:g}" cy="{_CLOCK_Y:g}" r="4"/>'
    return text


def _outputs(cell: Cell) -> str:
    pins = cell.pins
    text = _right_pin(pins.outp, 70.0)
    text += _right_pin(pins.outn, 98.0) if pins.outn else ""
    return text + (_right_pin(pins.unresolved, 140.0) if pins.unresolved else "")


def _supplies(cell: Cell) -> str:
    pins, text = cell.pins, ""
    if pins.vdd:
        text += f'<path class="wire" d="M150 {_TOP:g}V16"/>'
        text += _name(pins.vdd, 150.0, 11.0, "middle")
    return text + (
        f'<path class="wire" d="M150 {_BOTTOM:g}v14"/>' + _name(pins.vss, 150.0, 184.0, "middle")
    )


def _left_pin(name: str, y: float, end: float = _LEFT) -> str:
    return f'<path class="wire" d="M74 {y:g}H{end:g}"/>' + _name(name, 70.0, y + 4.0, "end")


def _right_pin(name: str, y: float) -> str:
    return f'<path class="wire" d="M{_RIGHT:g} {y:g}h22"/>' + _name(name, 230.0, y + 4.0, "start")


def _name(name: str, x: float, y: float, anchor: str) -> str:
    squeeze = ' textLength="66" lengthAdjust="spacingAndGlyphs"' if len(name) > _LONGEST else ""
    return f'<text class="pin {anchor}" x="{x:g}" y="{y:g}"{squeeze}>{escape(name)}</text>'
