"""A script: every level of every pin of one instance over time, for stimulus without a rhythm."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from pathlib import Path

import numpy as np
import numpy.typing as npt

from behavgen.check.runs import Run

__all__ = ["HIGH", "LOW", "Change", "Script", "X", "Z", "script_of", "write_script"]

Floats = npt.NDArray[np.float64]
Integers = npt.NDArray[np.int64]

LOW, HIGH, X, Z = range(4)
"""Levels of a logic pin."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Change:
    """One pin that changes; inputs change together.

    Parameters
    ----------
    time : int
        In ticks from the start of the run.
    pin : str
        ``"clk"``, ``"enable"``, ``"vdd"`` or ``"inputs"``.
    level : int, float or (float, float)
        `LOW` and the like; V; inp and inn in V.
    """

    time: int
    pin: str
    level: float | tuple[float, float]


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Script:
    """Levels from each moment on, shape (M,) each.

    Parameters
    ----------
    time : ndarray of int
        In ticks, rising, the first 0.
    clk, enable : ndarray of int
        `LOW` and the like.
    inp_v, inn_v, vdd_v : ndarray
    finish : int
        When nothing more can happen.
    """

    time: Integers
    clk: Integers
    enable: Integers
    inp_v: Floats
    inn_v: Floats
    vdd_v: Floats
    finish: int


def script_of(changes: Iterable[Change], *, after_last: int) -> Script:
    """Put changes in order, one a tick; before the first the clock is unknown, the supply on.

    Parameters
    ----------
    changes : iterable of Change
        The first ones, at time 0, give every analogue pin a level.
    after_last : int
        Ticks after the last change.
    """
    ordered = sorted(changes, key=lambda change: change.time)
    levels: dict[str, float | tuple[float, float]] = {
        "clk": X, "enable": HIGH, "vdd": 0.0, "inputs": (0.0, 0.0),
    }  # fmt: skip
    rows: list[tuple[int, int, int, float, float, float]] = []
    for change in ordered:
        levels[change.pin] = change.level
        time = change.time if not rows or change.time == 0 else max(change.time, rows[-1][0] + 1)
        if rows and rows[-1][0] == time == 0:
            rows.pop()
        inp, inn = levels["inputs"]  # type: ignore[misc]
        rows.append((time, levels["clk"], levels["enable"], inp, inn, levels["vdd"]))  # type: ignore[arg-type]
    columns = [np.array(column) for column in zip(*rows, strict=True)]
    return Script(
        time=columns[0], clk=columns[1], enable=columns[2], inp_v=columns[3], inn_v=columns[4],
        vdd_v=columns[5], finish=rows[-1][0] + after_last,
    )  # fmt: skip


def write_script(folder: Path, run: Run, script: Script) -> None:
    """Write the file that the harness plays: big-endian words of 64 bits."""
    moments = np.append(script.time, script.finish)
    rows = np.empty((len(moments), 5), dtype=">f8")
    levels = np.stack([script.inp_v, script.inn_v, script.vdd_v], axis=-1)
    rows[:, 2:] = np.append(levels, levels[-1:], axis=0)
    words = rows.view(">u8")
    words[:, 0] = np.diff(moments, prepend=0)
    codes = script.clk + 4 * script.enable
    words[:, 1] = np.append(codes, codes[-1:])
    rows.tofile(folder / f"{run.index}.script")
