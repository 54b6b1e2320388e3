"""The vectors of the self-checking bench: what is played to an instance and what it must show.

Made by the reference, not by the emitted text. A vector file is plain text for
``$readmemh``: words of 64 bits, then one more, the checksum of those before it.

    clock      two words a decision: its edge, and the end of its decision phase
    inputs     four words a change: its time, then inp, inn and vdd as IEEE 754 doubles
    expected   one word a look at the outputs: time, then two bits each for unresolved, outn
               and outp: 0, 1, 2 unknown, 3 not compared

Times are whole units of the time precision from the start of the simulation. The
outputs are looked at closely before and after every moment at which they change, so
that a delay that is off by more than a few units shows.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from dataclasses import dataclass, replace

import numpy as np
import numpy.typing as npt

from behavgen.check.levels import Levels
from behavgen.check.runs import MODES, Run, Settings
from behavgen.check.stimulus import Stimulus, make_stimulus
from behavgen.check.waveform import FLAG, OUTN, OUTP, Expectation, expect
from behavgen.formulas.random_stream import path_seed
from behavgen.handoff.packed_file import PackedFile
from behavgen.model import ComparatorModel
from behavgen.units import ZERO_CELSIUS_K

__all__ = ["CLOCK_WORDS", "INPUT_WORDS", "Vectors", "checksum", "make_vectors"]

Words = npt.NDArray[np.uint64]

CLOCK_WORDS, INPUT_WORDS = 2, 4
"""Words of a decision in a clock file, and of a change in an inputs file."""

DECISIONS = 960
"""Of all runs together."""
_FEWEST = 60
"""Of one run."""
_START_TICKS = 10
_NOT_COMPARED = 3
_SEED = 20
_UNCHARACTERISED_C = 27.0

_FNV_BASIS, _FNV_PRIME = 0xCBF29CE484222325, 0x100000001B3


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Vectors:
    """What one instance is played and must show.

    Parameters
    ----------
    run : Run
        With the instance's parameters.
    clock : ndarray of uint64, shape (decisions, CLOCK_WORDS)
    inputs : ndarray of uint64, shape (changes, INPUT_WORDS)
    expected : ndarray of uint64, shape (looks, 1)
    """

    run: Run
    clock: Words
    inputs: Words
    expected: Words

    def path(self, kind: str) -> str:
        """Return where a vector file lies: ``"clock"``, ``"inputs"`` or ``"expected"``."""
        return f"bench/vectors/run{self.run.index}_{kind}.hex"

    def files(self) -> tuple[PackedFile, ...]:
        """Return the vector files."""
        kinds = {"clock": self.clock, "inputs": self.inputs, "expected": self.expected}
        return tuple(
            PackedFile(path=self.path(kind), text=self._text(kind, words))
            for kind, words in kinds.items()
        )

    def _text(self, kind: str, words: Words) -> str:
        head = f"// {kind} of run {self.run.index}: {self.run.name}"
        rows = [" ".join(f"{word:016x}" for word in row) for row in words.tolist()]
        return "\n".join([head, *rows, f"{checksum(words.ravel()):016x}", ""])


def make_vectors(model: ComparatorModel) -> tuple[Vectors, ...]:
    """Return the vectors of all runs; the same model, the same vectors."""
    return tuple(_vectors_of(model, run) for run in _runs(model))


def checksum(words: Iterable[int] | Words) -> int:
    """Return the 64-bit FNV-1a sum of words, taken word by word.

    G. Fowler, L. C. Noll, K.-P. Vo, "The FNV non-cryptographic hash algorithm", IETF draft;
    the constants are theirs for 64 bits.
    """
    total = _FNV_BASIS
    for word in words:
        total = ((total ^ int(word)) * _FNV_PRIME) % 2**64
    return total


def _runs(model: ComparatorModel) -> Iterator[Run]:
    settings = _settings(model)
    each = max(DECISIONS // len(settings), _FEWEST)
    for index, (name, one) in enumerate(settings.items()):
        yield Run(index=index, name=name, given=one, meant=one, decisions=each)


def _settings(model: ComparatorModel) -> dict[str, Settings]:
    """Visit every process cold and hot without noise, then noise, mismatch and forced events."""
    cold, middle, hot = _temperatures(model)
    named = {}
    for number, process in enumerate(model.processes):
        quiet = Settings(
            process=process.name, temperature_c=cold, noise_on=False, seed=_SEED + number
        )
        named[f"{process.name}, coldest, noise off"] = quiet
        named[f"{process.name}, hottest, noise off"] = replace(
            quiet, temperature_c=hot, unresolved_mode=MODES.index("hold")
        )
    base = Settings(process=model.processes[0].name, temperature_c=middle, seed=_SEED + 100)
    named["noise on"] = base
    named["noise and mismatch on"] = replace(base, mismatch_on=True, seed=_SEED + 101)
    named["every third decision forced to stay unresolved"] = replace(
        base, force_unresolved_every=3, unresolved_mode=MODES.index("coin"), seed=_SEED + 102
    )
    return named


def _temperatures(model: ComparatorModel) -> tuple[float, float, float]:
    span = model.box.temperature_k
    if span is None:
        return (_UNCHARACTERISED_C,) * 3
    return tuple(round(k - ZERO_CELSIUS_K, 3) for k in (span.low, span.middle, span.high))  # type: ignore[return-value]


def _vectors_of(model: ComparatorModel, run: Run) -> Vectors:
    stimulus = make_stimulus(model, run, seed=path_seed(run.name))
    return Vectors(
        run=run,
        clock=_times(np.stack([stimulus.edge, stimulus.end], axis=-1)),
        inputs=_input_words(stimulus.levels),
        expected=_expected_words(expect(model, run, stimulus), stimulus),
    )


def _times(ticks: npt.NDArray[np.int64]) -> Words:
    return (ticks + _START_TICKS).astype(np.uint64)


def _input_words(levels: Levels) -> Words:
    volts = np.stack([levels.inp_v, levels.inn_v, levels.vdd_v], axis=-1)
    return np.column_stack([_times(levels.moment), volts.astype(np.float64).view(np.uint64)])


def _expected_words(expected: Expectation, stimulus: Stimulus) -> Words:
    looks: dict[int, npt.NDArray[np.int8]] = {}
    for number in np.flatnonzero(~expected.excluded):
        looks.update(_looks(expected, stimulus, int(number)))
    return np.array(
        [[(time + _START_TICKS) << 6 | _code(looks[time])] for time in sorted(looks)],
        dtype=np.uint64,
    ).reshape(-1, 1)


def _looks(
    expected: Expectation, stimulus: Stimulus, number: int
) -> Iterator[tuple[int, npt.NDArray[np.int8]]]:
    """Yield when to look during one decision and the reset after it, and what is to be seen.

    Always at least one unit away from anything that happens.
    """
    edge, ready, end, reset = (
        int(time[number]) for time in (expected.edge, expected.ready, expected.end, expected.reset)
    )
    before, shown, after, rest = (
        states[number] for states in (expected.before, expected.shown, expected.after,
                                      expected.rest)
    )  # fmt: skip
    next_edge = end + int(stimulus.gap[number])
    slack = expected.delay_tolerance + 1
    reset_slack = expected.reset_tolerance + 1
    if expected.resolved[number]:
        candidates = [(edge, ready - slack, ready, before), (ready, ready + slack, end, shown)]
    else:
        candidates = [(edge, end - 1, end, before)]
    if expected.returns[number]:
        candidates += [(end, reset - reset_slack, reset, after),
                       (reset, reset + reset_slack, next_edge, rest)]  # fmt: skip
    else:
        candidates.append((end, next_edge - 1, next_edge, after))
    for earliest, time, latest, state in candidates:
        if earliest < time < latest:
            yield time, state


def _code(state: npt.NDArray[np.int8]) -> int:
    """Pack what must be seen: unresolved, outn and outp, two bits each."""
    code = 0
    for column in (FLAG, OUTN, OUTP):
        value = int(state[column])
        code = code << 2 | (value if value >= 0 else _NOT_COMPARED)
    return code
