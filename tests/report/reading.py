"""Reads a report page back, strictly, with the standard library's parser alone."""

from __future__ import annotations

import re
from dataclasses import dataclass, field
from html.parser import HTMLParser

VOID = {"meta", "link"}
"""Elements of the page that have no end tag."""


@dataclass
class Element:
    """An element, its attributes and its children in order; texts are plain strings."""

    tag: str
    attributes: dict[str, str | None]
    children: list[Element | str] = field(default_factory=list)

    @property
    def text(self) -> str:
        """All text inside; white space is folded as browsers do, which leaves unbroken spaces."""
        parts = [c if isinstance(c, str) else c.text for c in self.children]
        return re.sub(r"[ \t\n]+", " ", " ".join(parts)).strip(" ")

    def all(self, tag: str = "") -> list[Element]:
        """Return this element and those inside it, of one tag if given."""
        here = [self] if tag in ("", self.tag) else []
        return here + [e for c in self.children if isinstance(c, Element) for e in c.all(tag)]

    def one(self, identity: str) -> Element:
        """Return the element with an id."""
        (found,) = [e for e in self.all() if e.attributes.get("id") == identity]
        return found

    def of_class(self, name: str) -> list[Element]:
        """Return the elements that carry a class."""
        return [e for e in self.all() if name in (e.attributes.get("class") or "").split()]


class _Reader(HTMLParser):
    def __init__(self) -> None:
        super().__init__(convert_charrefs=True)
        self.root = Element("", {})
        self.open = [self.root]

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        names = [name for name, _ in attrs]
        assert len(names) == len(set(names)), f"attribute twice in {tag}"
        element = Element(tag, dict(attrs))
        self.open[-1].children.append(element)
        if tag not in VOID:
            self.open.append(element)

    def handle_startendtag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.open[-1].children.append(Element(tag, dict(attrs)))

    def handle_endtag(self, tag: str) -> None:
        closed = self.open.pop()
        assert closed.tag == tag, f"</{tag}> closes <{closed.tag}>"

    def handle_data(self, data: str) -> None:
        self.open[-1].children.append(data)


def read_page(html: str) -> Element:
    """Return the page's root element.

    Raises
    ------
    AssertionError
        When tags are not balanced, so that a browser would have to guess.
    """
    reader = _Reader()
    reader.feed(html)
    reader.close()
    assert reader.open == [reader.root], f"left open: {[e.tag for e in reader.open[1:]]}"
    (page,) = [e for e in reader.root.children if isinstance(e, Element)]
    return page


def table_rows(table: Element) -> list[dict[str, str]]:
    """Return the rows of a table by column heading."""
    heads = [th.text for th in table.all("thead")[0].all("th")]
    rows = []
    for tr in table.all("tbody")[0].all("tr"):
        cells = [c.text for c in tr.children if isinstance(c, Element)]
        rows.append(dict(zip(heads, cells, strict=True)))
    return rows
