"""The decks of a package run in a bare folder, and decide as they say."""

from __future__ import annotations

import re
import subprocess

import numpy as np
import pytest

from behavgen.simulators.evas import find_evas
from behavgen.simulators.openvaf import find_openvaf
from behavgen.simulators.vacask import find_vacask, read_waves
from tests.handoff.packages import MODELS, written

pytestmark = pytest.mark.slow


def phase_of(deck: str) -> float:
    return float(re.search(r"stop=([0-9.e-]+)", deck)[1]) / 5


def decided(time, outp, outn, phase):
    """Return outp - outn at the end of both decision phases."""
    apart = outp - outn
    return [float(np.interp(end - 0.05 * phase, time, apart)) for end in (2 * phase, 4 * phase)]


@pytest.mark.parametrize("model", MODELS.values(), ids=MODELS)
def test_the_continuous_deck_decides_both_ways(model, tmp_path):
    name = model().cell.name
    folder = written(model(), tmp_path) / "analogue"
    guide = (folder / "guide_analogue.md").read_text()
    lines = [line.split() for line in re.findall(r"^    (\S.*)$", guide, re.MULTILINE)]
    programs = {"openvaf-r": find_openvaf().program, "vacask": find_vacask().program}
    for program, *words in lines:
        done = subprocess.run([programs[program], *words], cwd=folder, check=False,
                              capture_output=True, text=True, timeout=120)  # fmt: skip
        assert done.returncode == 0, done.stdout + done.stderr
    waves = read_waves(folder / "decide.raw")
    phase = phase_of((folder / f"{name}_step.sim").read_text())
    outp = waves["outp"]
    outn = waves["outn"] if "outn" in waves else 1.0 - outp
    first, second = decided(waves["time"], outp, outn, phase)
    assert first > 0.4
    assert second < -0.4


@pytest.mark.parametrize("model", MODELS.values(), ids=MODELS)
def test_the_event_driven_deck_decides_both_ways(model, tmp_path):
    name = model().cell.name
    folder = written(model(), tmp_path) / "analogue"
    deck = (folder / f"{name}_event_step.scs").read_text()
    # evas-sim reads one excluded value at most, and names its results by the analysis.
    module = folder.parent / "models" / f"{name}_event.va"
    module.write_text(re.sub(r" exclude \d+", "", module.read_text()))
    waves = find_evas().run(deck.replace("decide tran", "tran tran"), folder=folder)
    outp = waves["outp"]
    outn = waves["outn"] if "outn" in waves else 1.0 - outp
    first, second = decided(waves["time"], outp, outn, phase_of(deck))
    assert first > 0.4
    assert second < -0.4
