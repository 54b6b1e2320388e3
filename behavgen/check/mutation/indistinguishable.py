"""Why nobody can tell some mutants from the original.

Each rule knows one kind of line by its pattern, and what changes of it make no
difference. It is asked only about mutants that the probe did not see. A rule
that excused a mutant that can be told would be a fault of the check.
"""

from __future__ import annotations

import re

from behavgen.check.mutation.inertness import Inertness
from behavgen.check.mutation.mutants import Mutant
from behavgen.check.mutation.places import Place
from behavgen.check.mutation.rules import RULES

__all__ = ["reason_for"]


def reason_for(mutant: Mutant, text: str, inertness: Inertness) -> str:
    """Return why a mutant cannot be told from the original; "" when no rule knows it.

    Parameters
    ----------
    mutant : Mutant
    text : str
        The original.
    inertness : Inertness
        What the model never makes use of.
    """
    start = text.rfind("\n", 0, mutant.start) + 1
    whole = text[start : text.find("\n", start)]
    line = whole.lstrip()
    indent = len(whole) - len(line)
    place = Place(
        mutant=mutant, line=line, column=mutant.start - start - indent,
        task=_task_around(text, mutant.start), text=text, inertness=inertness,
    )  # fmt: skip
    fitting = (
        rule.reason
        for rule in RULES
        if mutant.kind in rule.kinds and re.match(rule.line, line) and rule.applies(place)
    )
    return next(fitting, "")


def _task_around(text: str, start: int) -> str:
    for found in re.finditer(r"^  (task|function).*?^  end\1", text, re.DOTALL | re.MULTILINE):
        if found.start() <= start < found.end():
            return found[0]
    return text
