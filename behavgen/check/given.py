"""A module of the user's own: what of the check can be asked of it, and what is left out.

It has the cell's name and ports; `outn`, `vdd`, `unresolved` and `enable` may be
missing, and so may parameters. Where its noise is another than the reference's,
decisions are compared with noise off and the noise by its distribution.
"""

from __future__ import annotations

import re
from collections.abc import Callable, Iterable
from dataclasses import dataclass, replace

from behavgen.check.runs import MODES, Batch, Run, Settings
from behavgen.model import ComparatorModel

__all__ = ["LEAST_OVERDRIVE_V", "Given", "given_text", "own_text", "playable"]

_STREAM = re.compile("9e3779b97f4a7c15", re.IGNORECASE)
"""The step of the reference's random stream: what has it may draw the same numbers."""
_OPTIONAL_PINS = ("outn", "vdd", "unresolved", "enable")
LEAST_OVERDRIVE_V = 1e-15
"""Smaller ones are left out: some last places of a volt, 2.2e-16 V, in which a module of the
user's own may round otherwise."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Given:
    """What is known of a module before it is simulated.

    Parameters
    ----------
    model : ComparatorModel
        Without the optional pins that the module does not have.
    parameters : frozenset of str
        Of the interface's parameters those that it has.
    plusargs : frozenset of str
        Names of the command line settings that it reads.
    same_stream : bool
        Whether it may draw the same random numbers.
    foreign : bool
        It was not made here: benches of the insides, the messages and the disturbances are
        left out.
    """

    model: ComparatorModel
    parameters: frozenset[str]
    plusargs: frozenset[str]
    same_stream: bool
    foreign: bool

    @property
    def switchable(self) -> ComparatorModel:
        """The model without what is random and cannot be switched on."""
        noisy, drawn = "NOISE_ON" in self.parameters, "MISMATCH_ON" in self.parameters
        return replace(
            self.model,
            noise=self.model.noise if noisy else None,
            mismatch=self.model.mismatch if drawn else None,
            points=tuple(p for p in self.model.points if noisy or p.quantity != "noise"),
        )


def own_text(model: ComparatorModel) -> Given:
    """Return what is expected of an emitted module: everything."""
    return Given(
        model=model, parameters=frozenset(_NEUTRAL), plusargs=frozenset(_PLUSARGS),
        same_stream=True, foreign=False,
    )  # fmt: skip


def given_text(model: ComparatorModel, text: str) -> Given:
    """Return what a module can be asked.

    Parameters
    ----------
    model : ComparatorModel
    text : str
        Its SystemVerilog.
    """
    stream = _STREAM.search(text.replace("_", "")) is not None
    pins = model.cell.pins
    present = {
        pin: name if name is not None and _names(text, name) else None
        for pin, name in ((pin, getattr(pins, pin)) for pin in _OPTIONAL_PINS)
    }
    cell = replace(
        model.cell,
        pins=replace(pins, outn=present["outn"], vdd=present["vdd"],
                     unresolved=present["unresolved"], enable=present["enable"]),
    )  # fmt: skip
    parameters = frozenset(name for name in _NEUTRAL if _names(text, name))
    return Given(
        model=replace(model, cell=cell),
        parameters=parameters,
        plusargs=frozenset(name for name in _PLUSARGS if name in text),
        same_stream=stream,
        foreign=not (stream and _names(text, "x_cause")),
    )


def _names(text: str, name: str) -> bool:
    return re.search(rf"\b{re.escape(name)}\b", text) is not None


_Neutral = Callable[[Settings, ComparatorModel], bool]
_NEUTRAL: dict[str, _Neutral] = {
    "OFFSET_SHIFT_V": lambda given, _: given.offset_shift_v == 0.0,
    "NOISE_ON": lambda given, _: not given.noise_on,
    "MISMATCH_ON": lambda given, _: not given.mismatch_on,
    "MEMORY_ON": lambda given, _: given.memory_on,
    "DELAY_ON": lambda given, _: given.delay_on,
    "SEED": lambda *_: True,
    "TEMPERATURE_C": lambda _, model: model.box.temperature_k is None,
    "PROCESS": lambda given, model: given.process == model.processes[0].name,
    "UNRESOLVED_MODE": lambda g, model: MODES[g.unresolved_mode] == model.cell.when_unresolved,
    "FORCE_UNRESOLVED_EVERY": lambda given, _: given.force_unresolved_every == 0,
    "WARNINGS": lambda *_: True,
}
"""Of each parameter whether settings can do without it."""
_PLUSARGS = (
    "behavgen_seed", "behavgen_noise", "behavgen_mismatch", "behavgen_temp_c", "behavgen_process",
)  # fmt: skip


def playable(given: Given, batches: Iterable[Batch]) -> tuple[tuple[Batch, ...], tuple[str, ...]]:
    """Return the batches that a module can play, and in words the runs that it cannot.

    Parameters
    ----------
    given : Given
    batches : iterable of Batch
    """
    kept, left_out = [], []
    for batch in batches:
        unread = _unread(given, batch)
        runs = []
        for run in batch.runs:
            why = f"reads no +{unread[0]}" if unread else _obstacle(given, run)
            if why:
                left_out.append(f"run {run.name}: the module {why}")
            else:
                runs.append(run)
        if runs:
            kept.append(replace(batch, runs=tuple(runs)))
    return tuple(kept), tuple(left_out)


def _unread(given: Given, batch: Batch) -> list[str]:
    """Return the settings on a batch's command line that matter and are not read."""
    model = given.model
    idle = {
        "behavgen_noise": model.noise is None,
        "behavgen_mismatch": model.mismatch is None,
        "behavgen_temp_c": model.box.temperature_k is None,
    }
    names = [argument.partition("=")[0] for argument in batch.plusargs]
    return [name for name in names if name not in given.plusargs and not idle.get(name, False)]


def _obstacle(given: Given, run: Run) -> str:
    """Return why a run cannot be played; "" if it can."""
    meant: Settings = run.meant
    for name, neutral in _NEUTRAL.items():
        if name not in given.parameters and not neutral(run.given, given.model):
            return f"has no parameter {name}"
    if given.same_stream:
        return ""
    if meant.noise_on or meant.mismatch_on:
        return "draws other random numbers"
    return "tosses another coin" if MODES[meant.unresolved_mode] == "coin" else ""
