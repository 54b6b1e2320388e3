"""Legal tables that are awkward: they give a model that holds, or a refusal in words."""

import numpy as np
import pytest

import behavgen
from behavgen.__main__ import main
from behavgen.applied_inputs import Levels
from behavgen.bands import Bands
from behavgen.errors import FitError
from behavgen.prediction import predict

REFUSED = 5
OVERDRIVE_V = np.geomspace(1e-6, 0.3, 12)


def delay_s(v, vdd=1.0, temp=27.0):
    v = np.asarray(v)
    tau = 10e-12 / vdd**2 * (1.0 + 0.002 * (temp - 27.0))
    return 30e-12 / vdd + tau * np.log1p(0.1 / v) + 10e-12 / (1.0 + v / 0.05)


def project(folder, quantity, header, rows):
    lines = [header, *(",".join(str(cell) for cell in row) for row in rows)]
    (folder / "table.csv").write_text("\n".join(lines) + "\n", encoding="utf-8")
    (folder / "behavgen.toml").write_text(
        f'[cells.c]\n[[cells.c.tables]]\nquantity = "{quantity}"\nfile = "table.csv"\n',
        encoding="utf-8",
    )
    return folder


def model_of(folder):
    found = behavgen.load_project(folder)
    return behavgen.fit(behavgen.read_tables(found, "c"))


WINDOWS = [(t, 0.2 * np.exp(-(t - 30e-12) / 10e-12)) for t in np.linspace(80e-12, 200e-12, 6)]
SCATTERED = np.random.default_rng(3).uniform([0.9, -40.0, 0.4], [1.1, 125.0, 0.7], (15, 3)).round(3)

FITTED = {
    "a single condition": ("delay", "overdrive,delay", [(v, delay_s(v)) for v in OVERDRIVE_V]),
    "three rows": ("delay", "overdrive,delay", [(v, delay_s(v)) for v in OVERDRIVE_V[3:9:2]]),
    "temperature alone": (
        "delay", "temp,overdrive,delay",
        [(t, v, delay_s(v, temp=t)) for t in (-40, 27, 125) for v in OVERDRIVE_V]),
    "three overdrives everywhere": (
        "delay", "vdd,temp,overdrive,delay",
        [(a, t, v, delay_s(v, a, t)) for a in (0.9, 1, 1.1) for t in (-40, 27, 125)
         for v in (1e-4, 1e-3, 0.1)]),
    "a single row beside a full condition": (
        "delay", "vdd,overdrive,delay",
        [(a, v, delay_s(v, a)) for a, n in ((0.9, 1), (1, 12), (1.1, 1)) for v in OVERDRIVE_V[:n]]),
    "ten thousand rows": (
        "delay", "overdrive,delay",
        [(f"{v:.9g}", delay_s(v)) for v in np.geomspace(1e-6, 0.3, 10_000)]),
    "negative inputs only": (
        "delay", "vdiff,offset,delay", [(-v - 1e-3, -1e-3, delay_s(v)) for v in OVERDRIVE_V]),
    "decisions of both signs": (
        "delay", "vdiff,delay,decision",
        [(s * v, (1.0 + 0.03 * (s > 0)) * delay_s(v), int(s > 0)) for v in OVERDRIVE_V
         for s in (1, -1)]),
    "a balanced row": (
        "delay", "overdrive,delay", [(0, ""), *((v, delay_s(v)) for v in OVERDRIVE_V)]),
    "delays of microseconds": (
        "delay", "overdrive,delay", [(v, 1e5 * delay_s(v)) for v in OVERDRIVE_V]),
    "common modes about zero": (
        "delay", "vcm,overdrive,delay",
        [(c, v, delay_s(v, 1.0 + 0.1 * c)) for c in (-0.3, 0, 0.3) for v in OVERDRIVE_V]),
    "scattered conditions": (
        "delay", "vdd,temp,vcm,overdrive,delay",
        [(a, t, c, v, delay_s(v, a, t)) for a, t, c in SCATTERED for v in OVERDRIVE_V]),
    "conditions on one line": (
        "delay", "vdd,temp,overdrive,delay",
        [(a, t, v, delay_s(v, a, t)) for a, t in ((0.9, 125), (1, 40), (1.1, -45))
         for v in OVERDRIVE_V]),
    "three processes at a condition each": (
        "delay", "process,vdd,overdrive,delay",
        [(p, a, v, f * delay_s(v, a)) for p, a, f in (("tt", 1, 1), ("ss", 0.9, 1.2),
         ("ff", 1.1, 0.9)) for v in OVERDRIVE_V]),
    "a common mode at which nothing resolves": (
        "delay", "vdd,vcm,overdrive,delay,observed_for",
        [(a, c, v, delay_s(v, a) if c > 0.4 else "", 2e-9) for a in (0.9, 1, 1.1)
         for c in (0.4, 0.5, 0.6) for v in OVERDRIVE_V]),
    "one of two common modes at which nothing resolves": (
        "delay", "vdd,vcm,overdrive,delay,observed_for",
        [(a, c, v, delay_s(v, a) if c > 0.4 else "", 2e-9) for a in (0.9, 1, 1.1)
         for c in (0.4, 0.6) for v in OVERDRIVE_V]),
    "units in headers": (
        "delay", "vdd [mV],temp (C),overdrive_mV,delay [ps]",
        [(1e3 * a, t, 1e3 * v, 1e12 * delay_s(v, a, t)) for a in (0.9, 1, 1.1)
         for t in (-40, 27, 125) for v in OVERDRIVE_V]),
    "windows alone": ("window", "resolve_time,window", WINDOWS),
    "counted windows": (
        "window", "resolve_time,trials,unresolved,span",
        [(t, 100_000, round(1e5 * w / 0.2), 0.2) for t, w in WINDOWS]),
    "energies at balance and beside it": ("energy", "vdiff,energy", [(0, 2e-14), (1e-3, 1e-14)]),
}  # fmt: skip

TOO_LITTLE = {
    "one row": ("delay", "overdrive,delay", [(1e-3, 1e-10)]),
    "two rows": ("delay", "overdrive,delay", [(1e-3, 1e-10), (1e-4, 1.2e-10)]),
    "one overdrive": (
        "delay", "vdd,overdrive,delay", [(a, 1e-3, delay_s(1e-3, a)) for a in (0.9, 1, 1.1)]),
    "nothing resolved": (
        "delay", "overdrive,delay,observed_for", [(v, "", 1e-9) for v in OVERDRIVE_V]),
    "two windows": ("window", "resolve_time,window", WINDOWS[:2]),
    "windows wider than searched": (
        "window", "resolve_time,window,searched_span", [(t, "", 0.1) for t, _ in WINDOWS]),
    "windows without a count": (
        "window", "resolve_time,trials,unresolved,span", [(t, 1000, 0, 0.2) for t, _ in WINDOWS]),
    "one reset time": ("memory", "reset_time,memory_shift", [(1e-10, 1e-3)]),
    "one instance": ("offset", "instance,offset", [("a", 1e-3)]),
}  # fmt: skip


@pytest.mark.filterwarnings("error")
@pytest.mark.parametrize("name", FITTED)
def test_a_model_that_holds(name, tmp_path):
    model = model_of(project(tmp_path, *FITTED[name]))
    predict(model, Levels.of(1e-3), resolve_time_s=4e-10, clock_hz=1e9)
    if model.delay is None:
        return
    overdrive_v = np.geomspace(1e-9, 1.0, 100)
    band = Bands(model).delay(overdrive_v)
    assert (band.value > 0.0).all()
    assert (np.diff(band.value) <= 0.0).all()
    assert np.isfinite(band.high).all()
    assert (band.low <= band.value).all()
    assert (band.value <= band.high).all()


@pytest.mark.filterwarnings("error")
@pytest.mark.parametrize("name", TOO_LITTLE)
def test_a_refusal_in_words(name, tmp_path, capsys):
    folder = project(tmp_path, *TOO_LITTLE[name])
    with pytest.raises(FitError):
        model_of(folder)
    assert main(["-C", str(folder), "fit"]) == REFUSED
    complaint = capsys.readouterr().err
    assert "measure" in complaint
    assert "Traceback" not in complaint
    assert not list(folder.rglob("*.model.json"))
