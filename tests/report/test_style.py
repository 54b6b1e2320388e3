"""The style sheet: enough contrast in both themes.

W3C, Web Content Accessibility Guidelines 2.2: 1.4.3 asks for 4.5:1 between
text and its ground, 1.4.11 for 3:1 of graphical objects.
"""

import re
from itertools import pairwise

import pytest

from behavgen.resources import template_folder

STYLE = (template_folder() / "report" / "style.css").read_text(encoding="utf-8")
THEMES = {"light": 0, "dark": 1, "print": 2}


def colours(theme):
    """Return the custom properties of the n-th ``:root`` block over those of the first."""
    blocks = re.findall(r":root \{(.*?)\}", STYLE, re.DOTALL)
    found = dict(re.findall(r"--([\w]+): (#\w{6})", blocks[0]))
    return found | dict(re.findall(r"--([\w]+): (#\w{6})", blocks[THEMES[theme]]))


def luminance(colour):
    """Return the relative luminance (WCAG 2.2, definition of relative luminance)."""
    channels = [int(colour[i : i + 2], 16) / 255 for i in (1, 3, 5)]
    linear = [c / 12.92 if c <= 0.04045 else ((c + 0.055) / 1.055) ** 2.4 for c in channels]
    return 0.2126 * linear[0] + 0.7152 * linear[1] + 0.0722 * linear[2]


def contrast(one, other):
    low, high = sorted((luminance(one), luminance(other)))
    return (high + 0.05) / (low + 0.05)


def test_black_on_white_is_twenty_one_to_one():
    assert contrast("#000000", "#ffffff") == pytest.approx(21.0)


@pytest.mark.parametrize("theme", THEMES)
@pytest.mark.parametrize("ground", ["paper", "wash"])
@pytest.mark.parametrize("text", ["ink", "soft", "good", "bad", "wait", "s0"])
def test_text_can_be_read(theme, ground, text):
    found = colours(theme)
    assert contrast(found[text], found[ground]) >= 4.5


@pytest.mark.parametrize("theme", THEMES)
@pytest.mark.parametrize("line", ["s0", "s1", "s2", "s3", "s4", "s5", "faint"])
def test_lines_can_be_seen(theme, line):
    found = colours(theme)
    assert contrast(found[line], found["paper"]) >= 3.0


def test_dark_and_print_redefine_every_colour():
    names = set(colours("light"))
    blocks = re.findall(r":root \{(.*?)\}", STYLE, re.DOTALL)
    for block in blocks[1:]:
        assert set(re.findall(r"--([\w]+):", block)) == names


def test_every_series_has_a_dash_pattern_of_its_own():
    dashes = re.findall(r"\.line\.s\d \{ stroke-dasharray: ([\d. ]+); \}", STYLE)
    assert len(dashes) == 5
    assert all(a != b for a, b in pairwise(sorted(dashes)))
