"""What a check can be asked beside its usual work."""

from __future__ import annotations

from dataclasses import dataclass

__all__ = ["QUESTIONS", "SIMULATORS", "Wishes"]

QUESTIONS = ("decisions", "tables", "distribution")
"""Does it equal the reference; does it give the tables back; is its random part right."""
SIMULATORS = ("icarus", "verilator")


@dataclass(frozen=True, slots=True, kw_only=True)
class Wishes:
    """How a check shall differ from the usual one.

    Parameters
    ----------
    simulator : str
        Of `SIMULATORS`; benches that need X run in ``"icarus"`` only.
    fresh_seed : int or None
        From which the seeds follow whose distribution is judged; None: the usual ones,
        with which a right model never alarms.
    questions : tuple of str
        Of `QUESTIONS`; only these are asked.
    """

    simulator: str = SIMULATORS[0]
    fresh_seed: int | None = None
    questions: tuple[str, ...] = QUESTIONS

    @property
    def folder(self) -> str:
        """Folder for what comes of it, beside that of the usual check; "" for the usual one."""
        return "" if self == Wishes() else f"other-checks/{self._name}"

    @property
    def _name(self) -> str:
        fresh = ["fresh-seeds"] if self.fresh_seed is not None else []
        return "-".join([self.simulator, *fresh, *self.questions])
