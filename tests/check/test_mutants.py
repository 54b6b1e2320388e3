"""Mutants of the emitted text: each must be caught by what looks at it.

A mutant that survives means that the check does not look there. Coefficients
are changed in the model that emits the text, everything else in the text.
"""

import re
from dataclasses import replace

import pytest

from tests.check.checking import checked, emitted_text, failures, shorten
from tests.example_models import full_model

pytestmark = pytest.mark.slow
MODEL = full_model()


def with_coefficient(surface, term, change, process="typ"):
    """Return a surface with one coefficient of one process changed."""
    variants = []
    for variant in surface.variants:
        values = list(variant.coefficients)
        if variant.process == process:
            values[term] = change(values[term])
        variants.append(replace(variant, coefficients=tuple(values)))
    return replace(surface, variants=tuple(variants))


def with_effect(name, term, change, process="typ"):
    """Return the text of a model with one changed coefficient in an effect's surface."""
    effect = getattr(MODEL, name)
    surface = with_coefficient(effect.surface, term, change, process)
    return emitted_text(replace(MODEL, **{name: replace(effect, surface=surface)}))


def with_tau(factor, process):
    """Return the text of a model with another regeneration time constant in one process."""
    from math import log  # noqa: PLC0415

    tau = with_coefficient(MODEL.delay.tau, 0, lambda value: value + log(factor), process)
    return emitted_text(replace(MODEL, delay=replace(MODEL.delay, tau=tau)))


def with_mismatch(term, change):
    first, *others = MODEL.mismatch.components
    components = (with_coefficient(first, term, change), *others)
    return emitted_text(replace(MODEL, mismatch=replace(MODEL.mismatch, components=components)))


SIGMA_V = 5e-4
COEFFICIENTS = {
    "tau by 2 %": lambda: with_tau(1.02, "typ"),
    "tau by 2 % in the slow process": lambda: with_tau(1.02, "slow"),
    "offset by 0.1 sigma": lambda: with_effect("offset", 0, lambda v: v + 0.1 * SIGMA_V),
    "offset by 0.1 sigma in the slow process": lambda: with_effect(
        "offset", 0, lambda v: v + 0.1 * SIGMA_V, "slow"
    ),
    "offset's sign": lambda: with_effect("offset", 0, lambda v: -v),
    "offset over temperature, sign": lambda: with_effect("offset", 1, lambda v: -v),
    "offset over supply": lambda: with_effect("offset", 2, lambda v: 1.1 * v),
    "offset over temperature and supply": lambda: with_effect("offset", 4, lambda v: 1.1 * v),
    "offset over supply and common mode": lambda: with_effect("offset", 6, lambda v: 1.1 * v),
    "noise by 1 %": lambda: with_effect("noise", 0, lambda v: v + 0.01),
    "noise over common mode": lambda: with_effect("noise", 5, lambda v: 1.1 * v),
    "mismatch over supply": lambda: with_mismatch(2, lambda v: 1.1 * v),
    "reset delay by 1 %": lambda: with_effect("reset", 0, lambda v: v + 0.01),
}
"""Effect by effect; the terms are those of the example's exponents."""


def swapped_edge(found):
    """Return a case of the clock's steps with the other direction."""
    return f"2'b{found[1][::-1]}: {found[2]}"


EDITS = {
    "a bit at exactly zero": (r"overdrive_v > 0\.0", "overdrive_v >= 0.0"),
    "reach of the noise": (r"CERTAIN_SIGMAS = 8\.3", "CERTAIN_SIGMAS = 8.2"),
    "a factor of the mixing function": ("94d0_49bb_1331_11eb", "94d0_49bb_1331_11ed"),
    "the golden step": ("9e37_79b9_7f4a_7c15", "9e37_79b9_7f4a_7c17"),
    "a centre constant, tenth digit": (r"3\.3430575583588128105e4", "3.3430575593588128105e4"),
    "a flank constant, tenth digit": (r"2\.27238449892691845833e-2", "2.27238449992691845833e-2"),
    "a tail constant, ninth digit": (r"2\.65321895265761230930e-2", "2.65321896265761230930e-2"),
    "a constant of the path's hash": ("0100_0000_01b3", "0100_0000_01b5"),
    "deciding edge": (r"2'b(01|10): (begin|end_phase)", swapped_edge),
    "deciding on a step from X": (r"2'b01: begin", "2'b01, 2'bx1: begin"),
    "reset state": (r"(returning = 1'b0;\s*outp = )1'b1", r"\g<1>1'b0"),
    "rounding of the delay": (r"#\(delay_s \* TICKS_PER_S\)", "#($floor(delay_s * TICKS_PER_S))"),
    "a phase that is a tick too short": (r"ready_by\(\$realtime\)", "ready_by($realtime + 1.0)"),
    "a lower clamp of the supply": (r": x_v_low;", ": vdd_v;"),
    "an upper clamp of the temperature": (
        r"\? temperature_k : x_t_high",
        "? temperature_k : temperature_k",
    ),
    "a clamp of the common mode": (r": x_c_high\) : x_c_low", ": vcm_v) : x_c_low"),
    "rounding of the common mode": (
        r"vcm_v = vcm_step / STEPS_PER_V",
        "vcm_v = (vcm_step + 0.4) / STEPS_PER_V",
    ),
    "supply threshold": (r"vdd >= SUPPLY_OFF_V", "vdd > SUPPLY_OFF_V"),
    "cause of an unresolved decision": (r"x_cause = 1;", "x_cause = 2;"),
    "coin of the next decision": (
        r"random_bits\(coin_key, decision_count\)",
        "random_bits(coin_key, decision_count + 64'd1)",
    ),
    "shift of the offset, sign": (r"\+ OFFSET_SHIFT_V", "- OFFSET_SHIFT_V"),
    "floor of the overdrive": (r"FLOOR_V = 1e-15", "FLOOR_V = 1e-14"),
    "temperature from the command line": ("behavgen_temp_c=", "behavgen_temperature="),
    "seed from the command line": ("behavgen_seed=", "behavgen_sed="),
    "a warning at every decision": (r"if \(common_mode_warnings == 1\)", "if (1)"),
    "a fatal warning": (r"if \(WARNINGS == 2\) \$fatal", "if (WARNINGS == 3) $fatal"),
    "a parameter's default": (r"(NOISE_ON +)= 1", r"\g<1>= 0"),
    "decision count while off": (
        r"decision_count = decision_count \+ 64'd1",
        "if (is_on) decision_count = decision_count + 64'd1",
    ),
}


def must_be_caught(text, tmp_path, monkeypatch):
    """Require more than short strata: the mutant itself must be seen."""
    shorten(monkeypatch)
    report = checked(MODEL, tmp_path, text)
    assert not report.passed
    assert "the text compiles" not in {bench.name for bench in report.benches}
    assert [words for words in failures(report) if not words.startswith("short")]


@pytest.mark.parametrize("name", COEFFICIENTS)
def test_a_changed_coefficient_is_caught(name, tmp_path, monkeypatch):
    text = COEFFICIENTS[name]()
    assert text != emitted_text(MODEL)
    must_be_caught(text, tmp_path, monkeypatch)


@pytest.mark.parametrize("name", EDITS)
def test_a_changed_text_is_caught(name, tmp_path, monkeypatch):
    pattern, replacement = EDITS[name]
    text, count = re.subn(pattern, replacement, emitted_text(MODEL))
    assert count > 0, f"the emitted text has no {pattern} any more: name its successor"
    must_be_caught(text, tmp_path, monkeypatch)


def test_the_unchanged_text_is_not_caught(tmp_path, monkeypatch):
    shorten(monkeypatch)
    report = checked(MODEL, tmp_path)
    assert [words for words in failures(report) if not words.startswith("short")] == []
