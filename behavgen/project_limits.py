"""What a project file says of limits -> `Limit` and `DriftLimit`, with all faults found."""

from __future__ import annotations

import re
from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

from behavgen.limits import DRIFTING, LIMITED, DriftLimit, Limit, Limited
from behavgen.nearest import did_you_mean
from behavgen.project_rules import ProjectFaults
from behavgen.project_schema import DriftPart, LimitPart, checked
from behavgen.toml_lines import KeyPath, line_of
from behavgen.units import UnitError, parse_si

if TYPE_CHECKING:
    from behavgen.project import Corner

__all__ = ["LimitReader"]

_SECONDS = {"minute": 60.0, "hour": 3600.0, "day": 86400.0, "year": 365.25 * 86400.0}
"""Units in which people give long times; the year is the Julian one."""
_LONG_TIME = re.compile(r"\s*([0-9.]+(?:[eE][+-]?[0-9]+)?)\s*(minute|hour|day|year)s?\s*")
_SHARE = re.compile(r"(.*?)\s*%\s*")
_APPLIED_AT = ("sigmas", "overdrive", "input", "span", "resolve_time", "clock", "reset_time")


@dataclass(frozen=True, slots=True, kw_only=True)
class LimitReader:
    """Reads limits of all cells and of single ones.

    Parameters
    ----------
    corners : mapping
        The project's corners by name.
    faults : ProjectFaults
        Where faults are noted.
    """

    corners: Mapping[str, Corner]
    faults: ProjectFaults

    def limits(
        self, content: Mapping[str, Any], path: KeyPath, *, cell: str = "", processes: Any = ()
    ) -> tuple[Limit, ...]:
        """Return the bounds under the key ``limits`` of a table.

        Parameters
        ----------
        content : mapping
            The table: the whole file, or that of a cell.
        path : tuple
            Keys that lead to it.
        cell : str
            The cell, "" for all.
        processes : iterable of str
            Names that a limit may use; empty: any.
        """
        entries = content.get("limits", [])
        if not isinstance(entries, list) or not all(isinstance(e, dict) for e in entries):
            if not path:  # the shape of a cell has said so
                self.faults.add(("limits",), "not a list", "entries are needed, as in [[limits]]")
            return ()
        found = []
        for index, entry in enumerate(entries):
            here = (*path, "limits", index)
            part = checked(LimitPart, entry, self._adder(here))
            if part is not None and self._is_sound(part, here, tuple(processes)):
                found.append(self._limit(part, here, cell))
        return tuple(limit for limit in found if limit is not None)

    def drift(
        self, content: Mapping[str, Any], path: KeyPath, *, cell: str = ""
    ) -> tuple[DriftLimit, ...]:
        """Return how far numbers may move, under the key ``drift`` of a table."""
        entry = content.get("drift", {})
        if not isinstance(entry, dict):
            if not path:
                self.faults.add(("drift",), "not a table", "a table is needed, as in [drift]")
            return ()
        here = (*path, "drift")
        part = checked(DriftPart, entry, self._adder(here))
        given = part.model_dump(exclude_none=True) if part is not None else {}
        found = (self._drift_limit(of, value, (*here, of), cell) for of, value in given.items())
        return tuple(limit for limit in found if limit is not None)

    def _adder(self, path: KeyPath) -> Callable[[KeyPath, str, str], None]:
        def add(key: KeyPath, what: str, allowed: str) -> None:
            self.faults.add((*path, *key), what, allowed)

        return add

    def _is_sound(self, part: LimitPart, path: KeyPath, processes: tuple[str, ...]) -> bool:
        known = LIMITED.get(part.of)
        if known is None:
            hint = did_you_mean(part.of, LIMITED)
            self.faults.add((*path, "of"), f"no limit of '{part.of}'{hint}",
                            f"one of {', '.join(LIMITED)}")  # fmt: skip
            return False
        faults = [*_faults_of_keys(part, known), *self._faults_of_names(part, processes)]
        for key, what, allowed in faults:
            self.faults.add((*path, key) if key else path, what, allowed)
        return not faults

    def _faults_of_names(
        self, part: LimitPart, processes: tuple[str, ...]
    ) -> Iterator[tuple[str, str, str]]:
        if part.corner is not None and part.corner not in self.corners:
            hint = did_you_mean(part.corner, self.corners)
            yield "corner", f"no corner '{part.corner}'{hint}", "one under [corners.NAME]"
        if part.corner is not None and any(
            value is not None for value in (part.process, part.temp, part.vdd, part.vcm)
        ):
            yield "corner", "a corner beside a condition", "one or the other"
        if processes and part.process is not None and part.process not in processes:
            hint = did_you_mean(part.process, processes)
            yield "process", f"no process '{part.process}'{hint}", f"one of {', '.join(processes)}"

    def _limit(self, part: LimitPart, path: KeyPath, cell: str) -> Limit | None:
        before = len(self.faults.found)
        below, above = (
            self._bound(getattr(part, side), LIMITED[part.of].unit, (*path, side))
            for side in ("below", "above")
        )
        if len(self.faults.found) > before:
            return None
        at = self.corners[part.corner] if part.corner is not None else None
        return Limit(
            of=part.of,
            below=below,
            above=above,
            cell=cell,
            sigmas=part.sigmas,
            overdrive_v=part.overdrive,
            input_v=part.input,
            span_v=part.span,
            resolve_time_s=part.resolve_time,
            clock_hz=part.clock,
            reset_time_s=part.reset_time,
            process=(at.process if at else part.process) or "",
            vdd_v=at.vdd_v if at else part.vdd,
            temperature_k=at.temperature_k if at else part.temp,
            vcm_v=at.vcm_v if at else part.vcm,
            line=line_of(path, self.faults.lines) or 0,
        )

    def _bound(self, value: str | float | None, unit: str, path: KeyPath) -> float | None:
        if value is None:
            return None
        try:
            return _number(str(value), unit)
        except UnitError as error:
            self.faults.add(path, str(error))
            return None

    def _drift_limit(
        self, of: str, value: str | float, path: KeyPath, cell: str
    ) -> DriftLimit | None:
        share = _SHARE.fullmatch(str(value))
        try:
            number = parse_si(share[1], "1") if share else parse_si(str(value), DRIFTING[of])
        except UnitError as error:
            self.faults.add(path, str(error), 'a share such as "5 %" or an amount with its unit')
            return None
        if number < 0.0:
            self.faults.add(path, f"{value}", "0 or more")
            return None
        line = line_of(path, self.faults.lines) or 0
        if share:
            return DriftLimit(of=of, share=0.01 * number, cell=cell, line=line)
        return DriftLimit(of=of, amount=number, cell=cell, line=line)


def _faults_of_keys(part: LimitPart, known: Limited) -> Iterator[tuple[str, str, str]]:
    """Yield key, what is wrong and what is allowed."""
    given = [key for key in _APPLIED_AT if getattr(part, key) is not None]
    for group in known.needs:
        count = sum(key in given for key in group)
        if count != 1:
            what = "without" if count == 0 else "with more than one of"
            yield "", f"{part.of} {what} {', '.join(group)}", f"one of {', '.join(group)}"
    for key in given:
        if key not in known.keys:
            allowed = f"of these: {', '.join(known.keys)}" if known.keys else "none is needed"
            yield key, f"{part.of} depends on no '{key}'", allowed
    if part.below is None and part.above is None:
        yield "", "a limit without a bound", "below, above or both"


def _number(text: str, unit: str) -> float:
    if unit == "s" and (match := _LONG_TIME.fullmatch(text)):
        return float(match[1]) * _SECONDS[match[2]]
    return parse_si(text, unit)
