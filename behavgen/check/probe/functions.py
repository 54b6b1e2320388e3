"""The module's own functions called directly: each result must be right to the last bit."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

import numpy as np
import numpy.typing as npt

from behavgen.formulas.exact_math import exact_exp, exact_ln
from behavgen.formulas.random_stream import standard_normal
from behavgen.model import ComparatorModel

__all__ = ["Functions", "functions_of"]

_COUNT = 1500
"""Arguments of each kind."""
_FILE = "functions"

Words = npt.NDArray[np.uint64]
Floats = npt.NDArray[np.float64]


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Functions:
    """Arguments and results of the functions that an instance has.

    Parameters
    ----------
    called : tuple
        Name, arguments as words of 64 bits, results.
    """

    called: tuple[tuple[str, Words, Floats], ...]

    def write(self, folder: Path) -> None:
        """Write all arguments."""
        for name, argument, _ in self.called:
            argument.astype(">u8").tofile(folder / f"{_FILE}.{name}.arguments")

    def text(self, instance: str) -> str:
        """Return what calls them in an instance and writes their results."""
        return "".join(_call(name, instance) for name, *_ in self.called)

    def fault(self, folder: Path) -> str:
        """Return which function is wrong; "" when none is."""
        for name, argument, expected in self.called:
            text = (folder / f"{_FILE}.{name}.insides").read_text(encoding="ascii")
            found = np.frombuffer(bytes.fromhex(text), dtype=">f8").astype(float)
            if len(found) != len(expected):
                return f"{name} does not return"
            wrong = np.flatnonzero(found != expected)
            if len(wrong):
                return f"{name} of {argument[wrong[0]]:016x}"
        return ""


def functions_of(model: ComparatorModel, *, seed: int) -> Functions:
    """Return the functions of a model's module that are called, none where it draws nothing.

    Parameters
    ----------
    model : ComparatorModel
    seed : int
        Of the arguments.
    """
    rng = np.random.default_rng([seed, 17])
    called = []
    if model.noise is not None or model.mismatch is not None:
        draw, centred = rng.integers(0, 2**64, _COUNT, dtype=np.uint64), _tail_bits(rng)
        bits = np.concatenate([draw, centred])
        called.append(("standard_normal", bits, standard_normal(bits)))
        share = np.exp(rng.uniform(np.log(2.0**-53), np.log(0.075), _COUNT))
        exponent = -rng.integers(5, 53, _COUNT).astype(float)
        seam = rng.uniform(0.69, 0.72, _COUNT) * 2.0**exponent
        share = np.concatenate([share, seam])
        called.append(("exact_ln", share.view(np.uint64), exact_ln(share)))
    if model.noise is not None:
        power = rng.uniform(-40.0, 5.0, _COUNT)
        called.append(("exact_exp", power.view(np.uint64), exact_exp(power)))
    return Functions(called=tuple(called))


def _tail_bits(rng: np.random.Generator) -> Words:
    """Return words whose normal numbers lie far out, on either side."""
    share = np.exp(rng.uniform(np.log(2.0**-52), np.log(1e-3), _COUNT))
    low = np.maximum(np.floor(share * 2.0**52), 0.0).astype(np.uint64)
    upper = rng.random(_COUNT) < 0.5
    kept = np.where(upper, np.uint64(2**52 - 1) - low, low)
    return kept << np.uint64(12)


def _call(name: str, instance: str) -> str:
    argument = "word" if name == "standard_normal" else "$bitstoreal(word)"
    return f"""\
  initial begin : call_{name}
    int from, into;
    logic [63:0] word;
    from = $fopen("{_FILE}.{name}.arguments", "rb");
    into = $fopen("{_FILE}.{name}.insides", "w");
    while ($fread(word, from) == 8)
      $fdisplay(into, "%h", $realtobits({instance}.dut.{name}({argument})));
    $fclose(from);
    $fclose(into);
  end
"""
