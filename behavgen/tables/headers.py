"""Which header holds which of our columns, in which unit, and in which form the quantity stands."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

from behavgen.nearest import did_you_mean
from behavgen.project import TableSettings
from behavgen.project_rules import condition_value
from behavgen.quantities import CONDITIONS, CORNER, QUANTITIES, Column, Form, columns_of
from behavgen.tables.faults import TableFaults
from behavgen.tables.guess import guess_column
from behavgen.units import Unit, UnitError, default_unit, find_unit, header_stem, unit_of_header

__all__ = ["BoundColumn", "Layout", "lay_out"]


@dataclass(frozen=True, slots=True, kw_only=True)
class BoundColumn:
    """One of our columns, found in a file.

    Parameters
    ----------
    column : Column
        What it is.
    header : str
        The user's header.
    index : int
        Position in the file, from 0.
    unit : Unit
        Unit of its plain numbers.
    """

    column: Column
    header: str
    index: int
    unit: Unit


@dataclass(frozen=True, slots=True, kw_only=True)
class Layout:
    """How one file is to be read.

    Parameters
    ----------
    form : Form
        The form in which the quantity stands there.
    columns : tuple of BoundColumn
        Found in the file.
    fixed : mapping
        Column names to the value, in SI, that holds for the whole file.
    filters : mapping
        Positions of columns to the values whose rows are kept.
    notices : tuple of str
        What a user should look at.
    """

    form: Form
    columns: tuple[BoundColumn, ...]
    fixed: Mapping[str, str | float]
    filters: Mapping[int, tuple[str | float, ...]]
    notices: tuple[str, ...]


def lay_out(
    settings: TableSettings, headers: Sequence[str], shown: str, faults: TableFaults
) -> Layout | None:
    """Match a table's settings with a file's headers, or note why they do not match.

    Parameters
    ----------
    settings : TableSettings
        The entry in the project file.
    headers : sequence of str
        As the file has them.
    shown : str
        The file's name for messages.
    faults : TableFaults
        Takes what is wrong.
    """
    before = len(faults)
    found = _find_columns(settings, headers, shown, faults)
    known = columns_of(settings.quantity)
    fixed = {name: value for name, value in settings.at.items() if name not in found}
    filters = _find_filters(settings, headers, shown, faults)
    if len(faults) > before:
        return None
    form = _form_of(settings, {*found, *fixed}, headers, shown, faults)
    if form is None:
        return None
    used = {*form.required, *form.optional, *(c.name for c in CONDITIONS), CORNER.name}
    columns = tuple(
        BoundColumn(
            column=known[name],
            header=headers[index],
            index=index,
            unit=_unit_of(known[name], headers[index], settings, shown, faults),
        )
        for name, index in sorted(found.items(), key=lambda item: item[1])
        if name in used
    )
    return Layout(
        form=form,
        columns=columns,
        fixed={
            name: condition_value(known[name], value, settings.units)
            for name, value in fixed.items()
            if name in used
        },
        filters=filters,
        notices=_unused_notices(settings, found, used, headers, shown),
    )


def _find_columns(
    settings: TableSettings, headers: Sequence[str], shown: str, faults: TableFaults
) -> dict[str, int]:
    """Return the position of each of our columns that the file has."""
    found: dict[str, int] = {}
    for name, header in settings.columns.items():
        if header.strip() in headers:
            found[name] = headers.index(header.strip())
        elif name not in settings.default_columns:
            faults.add(
                shown,
                f"no column '{header}' for {name}{did_you_mean(header, headers)}",
                _headers_found(headers),
                column=header,
            )
    taken = set(found.values())
    for name in columns_of(settings.quantity):
        if name in settings.columns and name not in settings.default_columns:
            continue
        alike = [
            index
            for index, header in enumerate(headers)
            if name in (header, header_stem(header)) and index not in taken
        ]
        if name in found or not alike:
            continue
        if len(alike) > 1:
            both = " and ".join(f"'{headers[index]}'" for index in alike)
            faults.add(
                shown, f"{both} both read as {name}", f'say which: columns = {{ {name} = "..." }}'
            )
        elif name in settings.at and name not in settings.default_at:
            header = headers[alike[0]]
            faults.add(
                shown,
                f"`at` fixes {name}, but the file has it as '{header}'",
                f"remove {name} from `at`, or rename the column",
                column=header,
            )
        found[name] = alike[0]
    return found


def _find_filters(
    settings: TableSettings, headers: Sequence[str], shown: str, faults: TableFaults
) -> dict[int, tuple[str | float, ...]]:
    filters = {}
    for header, values in settings.where.items():
        name = settings.columns.get(header, header)
        if (wanted := header if header in headers else name) in headers:
            filters[headers.index(wanted)] = values
        else:
            faults.add(
                shown,
                f"no column '{header}' to filter by{did_you_mean(header, headers)}",
                _headers_found(headers),
                column=header,
            )
    return filters


def _form_of(
    settings: TableSettings,
    available: set[str],
    headers: Sequence[str],
    shown: str,
    faults: TableFaults,
) -> Form | None:
    forms = QUANTITIES[settings.quantity].forms
    for form in forms:
        if available.issuperset(form.required):
            return form
    nearest = max(forms, key=lambda form: len(available.intersection(form.required)))
    missing = [name for name in nearest.required if name not in available]
    needed = "; or ".join(", ".join(form.required) for form in forms)
    likely = guess_column(columns_of(settings.quantity)[missing[0]], headers)
    hint = f", is it '{likely}'?" if likely else ""
    faults.add(
        shown,
        f"no column for {', '.join(missing)}{hint}",
        f"{settings.quantity} needs {needed}; {_headers_found(headers)}; "
        f'name it as in columns = {{ {missing[0]} = "{likely or "header"}" }}',
    )
    return None


def _unit_of(
    column: Column, header: str, settings: TableSettings, shown: str, faults: TableFaults
) -> Unit:
    """Return the unit a header carries, else the one in `units`, else the default."""
    if column.is_text:
        return Unit(text="")
    stated = settings.units.get(column.name)
    try:
        carried = unit_of_header(header, column.unit)
    except UnitError as error:
        if stated is None:
            hint = f'or say what is meant: units = {{ {column.name} = "{column.unit}" }}'
            faults.add(shown, str(error), hint, column=header)
        carried = None
    if carried is not None:
        return carried
    return find_unit(stated, column.unit) if stated is not None else default_unit(column.unit)


def _unused_notices(
    settings: TableSettings,
    found: Mapping[str, int],
    used: set[str],
    headers: Sequence[str],
    shown: str,
) -> tuple[str, ...]:
    """Return a word on every column that was named in vain or that looks like a condition."""
    notices = [
        f"{shown} column '{headers[index]}' is not used: {name} is not needed beside the others"
        for name, index in found.items()
        if name not in used and name in settings.columns and name not in settings.default_columns
    ]
    conditions = {column.name for column in (*CONDITIONS, CORNER)}
    missing = conditions - found.keys() - settings.at.keys()
    for index, header in enumerate(headers):
        likely = [c.name for c in CONDITIONS if c.name in missing and guess_column(c, [header])]
        if likely and index not in found.values():
            notices.append(f"{shown} column '{header}' is not used; is it {likely[0]}?")
    return tuple(notices)


def _headers_found(headers: Sequence[str]) -> str:
    return f"headers found: {', '.join(header or '(empty)' for header in headers)}"
