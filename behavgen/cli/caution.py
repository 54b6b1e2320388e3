"""The sentence that stands wherever a command shows results."""

__all__ = ["CAUTION"]

CAUTION = (
    "These results follow from the tables named and hold inside the ranges shown; they replace "
    "neither transistor-level sign-off nor your own safety process."
)
