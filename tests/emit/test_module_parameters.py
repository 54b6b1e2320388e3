"""The parameters of emitted modules: an interface that does not move."""

from __future__ import annotations

from dataclasses import replace

import pytest

from behavgen.emit.module_parameters import default_temperature_c, module_parameters
from behavgen.model import Box, Range
from tests.example_models import full_model, minimal_model

NAMES = (
    "OFFSET_SHIFT_V", "NOISE_ON", "MISMATCH_ON", "MEMORY_ON", "DELAY_ON", "SEED", "TEMPERATURE_C",
    "PROCESS", "UNRESOLVED_MODE", "FORCE_UNRESOLVED_EVERY", "WARNINGS",
)  # fmt: skip


def by_name(model):
    return {parameter.name: parameter for parameter in module_parameters(model)}


@pytest.mark.parametrize("model", [full_model(), minimal_model()], ids=["full", "minimal"])
def test_all_parameters_are_there_in_their_order(model):
    assert tuple(by_name(model)) == NAMES


def test_defaults_simulate_a_nominal_instance():
    defaults = {name: p.default for name, p in by_name(full_model()).items()}
    assert defaults == {
        "OFFSET_SHIFT_V": 0.0, "NOISE_ON": 1, "MISMATCH_ON": 0, "MEMORY_ON": 1, "DELAY_ON": 1,
        "SEED": 0, "TEMPERATURE_C": 27.0, "PROCESS": 0, "UNRESOLVED_MODE": 0,
        "FORCE_UNRESOLVED_EVERY": 0, "WARNINGS": 1,
    }  # fmt: skip


@pytest.mark.parametrize(("words", "code"), [("x", 0), ("coin", 1), ("hold", 2)])
def test_the_cell_says_what_unresolved_outputs_show(words, code):
    assert by_name(full_model(when_unresolved=words))["UNRESOLVED_MODE"].default == code


def test_the_process_is_known_by_its_stable_code():
    process = by_name(full_model())["PROCESS"]
    assert process.codes == ((0, "typ"), (3, "slow"))
    turned = replace(full_model(), processes=full_model().processes[::-1])
    assert by_name(turned)["PROCESS"].default == 3


def test_what_is_not_characterised_does_nothing_and_says_so():
    parameters = by_name(minimal_model())
    idle = {name for name, parameter in parameters.items() if not parameter.effective}
    assert idle == {"NOISE_ON", "MISMATCH_ON", "MEMORY_ON", "TEMPERATURE_C"}
    assert all("does nothing" in parameters[name].note for name in idle)


@pytest.mark.parametrize(
    ("span", "default"),
    [(None, 27.0), ((233.15, 398.15), 27.0), ((333.15, 373.15), 80.0)],
)
def test_the_default_temperature_lies_in_the_characterised_range(span, default):
    box = Box(temperature_k=None if span is None else Range(low=span[0], high=span[1]))
    assert default_temperature_c(box) == default
