"""What a user is told about the tables: counts taken from the files' own description."""

from __future__ import annotations

import pytest

from behavgen.tables.summary import summarise, summary_lines


def lines_of(tables):
    return [" ".join(line.split()) for line in summary_lines(summarise(tables))]


def test_the_characterised_latch(latch_130n):
    # Counts: README.md beside the tables. Ranges: smallest and largest cells of the files.
    lines = lines_of(latch_130n)
    assert lines[0] == "latch_130n"
    delay = "delay delay.csv 1015 rows 27 tt + 1 ff + 1 ss conditions 1 uV..300 mV 41.3 ps..1.51 ns"
    assert delay in lines
    noise = "noise noise.csv 35 rows 5 conditions, 7 levels x 200 -1.55 mV..1.55 mV"
    assert f"{noise} process not given: holds for all" in lines
    offset = "offset offset.csv 210 rows 120 instances -11.9 mV..13.9 mV"
    several = "30 of them at more than one condition"
    assert f"{offset} {several} process not given: holds for all" in lines
    window = "window window.csv 28 rows 4 conditions 120 ps..520 ps 40.1 nV..88.6 mV"
    assert f"{window} process not given: holds for all" in lines
    memory = (
        "memory memory.csv 7 rows 2 conditions 60 ps..250 ps 1.96 mV..100 mV 2 at least so much"
    )
    assert f"{memory} process not given: holds for all" in lines
    aperture = "aperture aperture.csv 84 rows 3 conditions -80 ps..170 ps steps of 20 mV..100 mV"
    assert f"{aperture} process not given: holds for all" in lines
    energy = "energy energy.csv 40 rows 10 conditions 10 uV..200 mV 78.4 fJ..221 fJ"
    assert f"{energy} process not given: holds for all" in lines
    kickback = "kickback kickback.csv 12 rows 1 condition common -3.63 fC..-3.59 fC"
    more = "differential -268 aC..7.67 aC sources of 100 ohm..10 kohm"
    assert f"{kickback} {more} process not given: holds for all" in lines
    assert "absent reset" in lines
    box = "box vdd 1.62 V..1.98 V temp -40 degC..125 degC vcm 800 mV..1.2 V process tt ff ss"
    assert box in lines
    gap = "look at noise covers 5 of 29 conditions; elsewhere sigma is interpolated or clamped"
    assert gap in lines


def test_columns_are_aligned_and_plain_ascii(latch_130n):
    lines = summary_lines(summarise(latch_130n))
    assert all(line.isascii() and line == line.rstrip() for line in lines)
    rows = [line.index(" rows") for line in lines if " rows " in line]
    assert len(rows) == 8 and len(set(rows)) == 1


DELAY = 'quantity = "delay"\nfile = "d.csv"\n'


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("overdrive,delay\n1m,1p\n-1m,1p\n", "how delay is measured is not said"),
        ("overdrive,delay\n1m,1p\n", "positive overdrive only"),
        ("overdrive,delay\n1m,1p\n-1m,1p\n1u,\n", "within an unknown time, not used: 1"),
        ("overdrive,delay,decision\n1m,1p,0\n-1m,1p,1\n", "against the sign of their overdrive: 2"),
        ("overdrive,delay,VDD\n1m,1p,1\n", "column 'VDD' is not used"),
    ],
)
def test_gaps_are_said_aloud(read, text, words):
    lines = lines_of(read({"d.csv": text}, DELAY))
    assert any(line.startswith("look at") and words in line for line in lines)


def test_failed_and_unresolved_rows_are_counted(read):
    text = "overdrive,delay,observed_for\n1m,1p,1n\n-1m,failed,1n\n1u,,1n\n-1u,1p,1n\n"
    lines = lines_of(read({"d.csv": text}, f'{DELAY}measured = "x"'))
    expected = "delay d.csv 3 rows 1 failed, 1 condition 1 uV..1 mV 1 ps 1 not resolved"
    assert f"{expected} conditions not given: holds everywhere" in lines


def test_processes_with_few_conditions_are_said_to_be_scaled(read):
    text = "overdrive,delay,process,vdd\n1m,1p,tt,1\n1m,1p,tt,2\n-1m,1p,ss,1\n"
    summary = summarise(read({"d.csv": text}, DELAY))
    assert "process ss at 1 of 2 conditions: tt is scaled to it" in summary.notices


def test_several_files_are_counted(read):
    files = {"d1.csv": "overdrive,delay\n1m,1p\n", "d2.csv": "overdrive,delay\n2m,1p\n"}
    summary = summarise(read(files, 'quantity = "delay"\nfile = "d*.csv"'))
    (delay,) = summary.quantities
    assert (delay.files, delay.rows) == (("d1.csv", "d2.csv"), 2)
    assert any("2 files" in line for line in summary_lines(summary))


def test_windows_without_an_unresolved_trial_are_pointed_at(read):
    text = "resolve_time,trials,unresolved,span\n1n,100,3,1m\n2n,100,0,1m\n"
    notices = summarise(read({"w.csv": text}, 'quantity = "window"\nfile = "w.csv"')).notices
    assert any("without an unresolved trial: 1" in notice for notice in notices)


def test_conditions_left_open_fit_all(read):
    files = {
        "d.csv": "overdrive,delay,vdd,process\n1m,1p,1,tt\n1m,1p,1,ss\n1m,1p,2,tt\n",
        "n.csv": "sigma,vdd\n1m,1\n1m,2\n",
    }
    tables = read(files, DELAY, 'quantity = "noise"\nfile = "n.csv"')
    notices = summarise(tables).notices
    assert "noise covers 2 of 3 conditions; elsewhere sigma is interpolated or clamped" in notices
