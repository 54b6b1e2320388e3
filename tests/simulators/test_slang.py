"""slang says what is wrong with a text, and where."""

from behavgen.simulators.slang import elaborate, slang_version


def judged(tmp_path, text, **macros):
    source = tmp_path / "with space.sv"
    source.write_text(text)
    return elaborate([source], top="m", macros=macros)


def test_a_clean_text(tmp_path):
    text = "module m (input logic a, output logic b);\n  assign b = a;\nendmodule\n"
    found = judged(tmp_path, text)
    assert (found.errors, found.warnings, found.text) == (0, 0, "")


def test_errors_and_warnings_are_told_apart(tmp_path):
    text = "module m (output logic [1:0] b);\n  int wide;\n  assign b = wide;\nendmodule\n"
    assert judged(tmp_path, text).errors == 0
    assert judged(tmp_path, text).warnings > 0
    broken = judged(tmp_path, text.replace("wide;\nendmodule", "narrow;\nendmodule"))
    assert broken.errors == 1
    assert "with space.sv:3" in broken.text


def test_macros_reach_the_text(tmp_path):
    assert judged(tmp_path, "module `NAME ();\nendmodule\n", NAME="m").errors == 0


def test_a_missing_file_is_an_error(tmp_path):
    assert elaborate([tmp_path / "none.sv"], top="m").errors == 1


def test_the_version_is_named():
    assert slang_version().startswith("slang ")
