"""One example for those who look for the first time: a SAR converter around the model."""

from __future__ import annotations

from pathlib import Path
from tempfile import TemporaryDirectory

from behavgen.files import write_whole
from behavgen.handoff.examples.experiment import Experiment
from behavgen.handoff.examples.experiments import sar_noise
from behavgen.handoff.examples.page import examples_page
from behavgen.model import ComparatorModel

__all__ = ["show_converter"]

_CONVERSIONS = 400


def show_converter(model: ComparatorModel, page: Path) -> Experiment:
    """Simulate a SAR converter over its noise and write the page about it.

    Raises
    ------
    ToolError
        When no simulator is found, or it fails.
    ProjectError
        When the page cannot be written.
    """
    with TemporaryDirectory(prefix="behavgen-converter-") as folder:
        experiment = sar_noise(model, Path(folder), conversions=_CONVERSIONS)
    write_whole(page, examples_page(model, (experiment,)))
    return experiment
