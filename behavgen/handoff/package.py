"""Everything that a package holds, from a model, its checked texts and its check."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

from behavgen.check.verdict import CheckReport
from behavgen.emit.emitted_file import EmittedFile
from behavgen.emit.templating import render
from behavgen.handoff.bench import bench_files
from behavgen.handoff.bus import bus_file
from behavgen.handoff.data_sheet import data_sheet
from behavgen.handoff.decks import deck_files
from behavgen.handoff.disclosure import refuse_origins, without_origins
from behavgen.handoff.first_page import first_page
from behavgen.handoff.guides import analogue_guide, digital_guide
from behavgen.handoff.ipxact import ipxact_file
from behavgen.handoff.manifest import manifest
from behavgen.handoff.models import file_list, model_files
from behavgen.handoff.packed_file import PackedFile
from behavgen.handoff.properties import properties_file
from behavgen.handoff.standing import CAUTION, Standing, standing_of
from behavgen.handoff.symbol import symbol_file, symbol_of
from behavgen.model import ComparatorModel
from behavgen.model_file import dump_model
from behavgen.project import SymbolSettings

__all__ = ["Wishes", "package_files", "package_name"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Wishes:
    """What the sender decides.

    Parameters
    ----------
    symbol : SymbolSettings or None
        None: the cell's own pins.
    vendor : str
        Stands in the IP-XACT description.
    ipxact : str
        Year of the standard: ``"2022"`` or ``"2014"``.
    disclose : bool
        Name the tables and add the model file.
    """

    symbol: SymbolSettings | None = None
    vendor: str = "local"
    ipxact: str = "2022"
    disclose: bool = False


def package_name(model: ComparatorModel) -> str:
    """Return the name of the package's folder."""
    return f"{model.cell.name}_handoff"


def package_files(
    model: ComparatorModel,
    emitted: Iterable[EmittedFile],
    check: CheckReport | None,
    wishes: Wishes,
) -> tuple[PackedFile, ...]:
    """Return all files of a package, the manifest last; the same arguments, the same bytes.

    Parameters
    ----------
    model : ComparatorModel
    emitted : iterable of EmittedFile
        Its checked texts.
    check : CheckReport or None
        Of these texts; None: there is none, which every page then says.
    wishes : Wishes

    Raises
    ------
    ProjectError
        When a text names a table that is not to be named.
    """
    told = model if wishes.disclose else without_origins(model)
    standing = standing_of(check)
    symbol = symbol_of(told, wishes.symbol)
    files = [
        *_simulated(told, emitted, symbol, standing),
        *_pages(told, symbol, standing),
        _data_sheet(told, check, standing),
        ipxact_file(told, standing, vendor=wishes.vendor, edition=wishes.ipxact),
    ]
    if wishes.disclose:
        files.append(PackedFile(path=f"models/{model.cell.name}.model.json", text=dump_model(told)))
    else:
        refuse_origins(files, model.sources)
    return (*files, manifest(files))


def _simulated(
    model: ComparatorModel,
    emitted: Iterable[EmittedFile],
    symbol: SymbolSettings,
    standing: Standing,
) -> tuple[PackedFile, ...]:
    """Return what simulators read, and what starts them."""
    name = model.cell.name
    models = model_files(model, emitted, standing)
    module = next(file for file in models if file.path == f"models/{name}.sv")
    shells = (symbol_file(model, symbol, standing), bus_file(model, standing))
    bench = bench_files(model, symbol, standing)
    modules = [file for file in bench if file.path.endswith(".sv")]
    return (
        *models,
        *shells,
        *bench,
        properties_file(model, standing),
        file_list("files.f", (module, *shells)),
        file_list("bench.f", modules),
        _rendered("run.sh", model, standing, executable=True),
        _rendered("Makefile", model, standing),
    )


def _pages(
    model: ComparatorModel, symbol: SymbolSettings, standing: Standing
) -> tuple[PackedFile, ...]:
    """Return what people read."""
    return (
        first_page(model, symbol, standing),
        digital_guide(model, symbol, standing),
        analogue_guide(model, standing),
        *deck_files(model),
        _rendered("LICENCE.txt", model, standing),
    )


def _data_sheet(
    model: ComparatorModel, check: CheckReport | None, standing: Standing
) -> PackedFile:
    note = "" if standing.sound else standing.sentence
    return PackedFile(path="data_sheet.html", text=data_sheet(model, check, caution_note=note))


def _rendered(
    name: str, model: ComparatorModel, standing: Standing, *, executable: bool = False
) -> PackedFile:
    text = render(
        f"handoff/{name}", cell=model.cell.name, standing=standing.sentence, caution=CAUTION
    )
    return PackedFile(path=name, text=text, executable=executable)
