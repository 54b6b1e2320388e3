"""A project of one small cell, its tables computed from the closed forms of an invented latch."""

from __future__ import annotations

import math
from pathlib import Path

__all__ = ["DELAY_ROWS", "NOISE_ROWS", "PROJECT_TEXT", "write_small_project"]

PROJECT_TEXT = """\
[cells.latch]
description = "invented latch"

[[cells.latch.tables]]
quantity = "delay"
file = "delay.csv"
measured = "clk 50 % to outp-outn at half supply"

[[cells.latch.tables]]
quantity = "noise"
file = "noise.csv"
"""

_TAU_S = {1.0: 20e-12, 1.2: 16e-12}

DELAY_ROWS = (
    "vdd,overdrive,delay",
    *(
        f"{vdd},{overdrive_v:.6g},{tau_s * math.log(0.8 / overdrive_v) + 20e-12:.6g}"
        for vdd, tau_s in _TAU_S.items()
        for overdrive_v in (10.0 ** (-6 + 5 * k / 12) for k in range(13))
    ),
)
"""Delay tau ln(0.8 V / overdrive) + 20 ps."""

NOISE_ROWS = (
    "vdiff,trials,ones",
    *(
        f"{z * 1e-3:g},1000,{round(500 * math.erfc(-z / math.sqrt(2)))}"
        for z in (-2.0, -1.5, -1.0, -0.5, 0.0, 0.5, 1.0, 1.5, 2.0)
    ),
)
"""Expected counts of a latch with 1 mV of noise and no offset."""


def write_small_project(
    folder: Path,
    *,
    project: str = PROJECT_TEXT,
    delay: tuple[str, ...] = DELAY_ROWS,
    noise: tuple[str, ...] = NOISE_ROWS,
) -> Path:
    """Write the project into `folder` and return the folder."""
    folder.mkdir(parents=True, exist_ok=True)
    (folder / "behavgen.toml").write_text(project, encoding="utf-8")
    (folder / "delay.csv").write_text("\n".join(delay) + "\n", encoding="utf-8")
    (folder / "noise.csv").write_text("\n".join(noise) + "\n", encoding="utf-8")
    return folder
