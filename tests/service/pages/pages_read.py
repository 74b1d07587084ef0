"""A page as a test reads it: a tree of its elements, and what of it a person sees."""

from collections.abc import Iterator
from html.parser import HTMLParser

VOID = {"area", "base", "br", "col", "embed", "hr", "img", "input", "link", "meta", "source", "track", "wbr"}


class Element:
    """An element of a page."""

    def __init__(self, tag: str, attributes: dict[str, str]) -> None:
        self.tag = tag
        self.attributes = attributes
        self.children: list[Element | str] = []

    @property
    def text(self) -> str:
        """The words in it, with single spaces."""
        return " ".join(" ".join(self._words()).split())

    def all(self, tag: str, **attributes: str) -> list["Element"]:
        """The elements of a tag in it that have these attributes; `data_do` asks for data-do."""
        wanted = {name.rstrip("_").replace("_", "-"): value for name, value in attributes.items()}
        return [one for one in self.everything() if one.tag == tag and wanted.items() <= one.attributes.items()]

    def one(self, tag: str, **attributes: str) -> "Element":
        """The only such element."""
        found = self.all(tag, **attributes)
        assert len(found) == 1, (tag, attributes, len(found))
        return found[0]

    def everything(self) -> Iterator["Element"]:
        """The elements in it, each before those in it."""
        for child in self.children:
            if isinstance(child, Element):
                yield child
                yield from child.everything()

    def _words(self) -> Iterator[str]:
        for child in self.children:
            if isinstance(child, str):
                yield child
            elif child.tag != "script":
                yield from child._words()


class _Reader(HTMLParser):
    def __init__(self) -> None:
        super().__init__()
        self.open = [Element("", {})]

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        made = Element(tag, {name: value or "" for name, value in attrs})
        self.open[-1].children.append(made)
        if tag not in VOID:
            self.open.append(made)

    def handle_endtag(self, tag: str) -> None:
        assert self.open[-1].tag == tag, f"</{tag}> ends <{self.open[-1].tag}>"
        self.open.pop()

    def handle_data(self, data: str) -> None:
        self.open[-1].children.append(data)


def page_read(html: str) -> Element:
    """A page, all of whose elements are closed in their order."""
    reader = _Reader()
    reader.feed(html)
    reader.close()
    assert len(reader.open) == 1, f"<{reader.open[-1].tag}> is not closed"
    return reader.open[0]
