"""The model file: deterministic, readable, and back again."""

import json
from dataclasses import replace
from pathlib import Path

import pytest

from behavgen.errors import ModelFileError
from behavgen.model import significant
from behavgen.model_file import dump_model, load_model
from tests.example_models import complete_model, full_model, minimal_model, renamed_pins_model


@pytest.mark.parametrize(
    "model", [full_model(), complete_model(), minimal_model(), renamed_pins_model()]
)
def test_a_model_file_loads_back_to_an_equal_model(model, tmp_path):
    file = tmp_path / "cell.model.json"
    file.write_text(dump_model(model))
    assert load_model(file) == model


def test_the_same_model_gives_the_same_bytes():
    assert dump_model(full_model()) == dump_model(full_model())


def test_keys_are_sorted_everywhere():
    def check(value):
        if isinstance(value, dict):
            assert list(value) == sorted(value)
            for inner in value.values():
                check(inner)
        elif isinstance(value, list):
            for inner in value:
                check(inner)

    check(json.loads(dump_model(full_model())))


def test_not_a_number_never_enters_a_model_file():
    model = full_model()
    assert model.delay is not None
    with pytest.raises(ValueError, match="JSON"):
        dump_model(replace(model, delay=replace(model.delay, floor_v=float("nan"))))


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("{", "cannot be read"),
        ("[]", "format None"),
        ('{"format": 99}', "format 99"),
        ('{"format": 1, "cell": {"name": 3}}', "cell.name"),
    ],
)
def test_a_bad_model_file_is_refused_in_words(text, message, tmp_path):
    file = tmp_path / "cell.model.json"
    file.write_text(text)
    with pytest.raises(ModelFileError, match=message) as caught:
        load_model(file)
    assert "behavgen fit" in str(caught.value)


def test_a_missing_model_file_is_refused_in_words():
    with pytest.raises(ModelFileError, match="cannot be read"):
        load_model(Path("nowhere.model.json"))


def test_significant_digits():
    assert significant(1.23456789012345e-11) == 1.23456789e-11
    assert significant(-0.0) == 0.0
    assert significant(123456.0, 3) == 123000.0
