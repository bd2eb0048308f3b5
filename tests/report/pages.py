"""An HTML page read strictly, for the tests: elements, attributes, links and text."""

from dataclasses import dataclass, field
from html.parser import HTMLParser

VOID = {"meta", "br", "img", "link", "input", "hr", "col"}
DRAWN_EMPTY = {"path", "rect", "circle", "line", "use"}


@dataclass
class Page(HTMLParser):
    """What a page holds. ValueError where an element is not closed as it was opened."""

    elements: list[tuple[str, dict[str, str]]] = field(default_factory=list)
    text: list[str] = field(default_factory=list)
    open_: list[str] = field(default_factory=list)

    def __post_init__(self) -> None:
        super().__init__(convert_charrefs=True)

    @classmethod
    def read(cls, source: str) -> "Page":
        """The page with that source."""
        page = cls()
        page.feed(source)
        page.close()
        if page.open_:
            raise ValueError(f"left open: {page.open_}")
        return page

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        """An element begins."""
        self.elements.append((tag, {name: value or "" for name, value in attrs}))
        if tag not in VOID:
            self.open_.append(tag)

    def handle_startendtag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        """An element of a picture that has no content."""
        if tag not in DRAWN_EMPTY | VOID:
            raise ValueError(f"{tag} may not be closed at once")
        self.elements.append((tag, {name: value or "" for name, value in attrs}))

    def handle_endtag(self, tag: str) -> None:
        """An element ends."""
        if not self.open_ or self.open_.pop() != tag:
            raise ValueError(f"{tag} closes nothing at {self.getpos()}")

    def handle_data(self, data: str) -> None:
        """Text; style sheets are not text to a reader."""
        if "style" not in self.open_:
            self.text.append(data)

    def words(self) -> str:
        """All text, blanks collapsed."""
        return " ".join(" ".join(self.text).split())

    def attributes(self, name: str) -> list[str]:
        """Every value of that attribute."""
        return [attrs[name] for _, attrs in self.elements if name in attrs]

    def tags(self) -> set[str]:
        """The kinds of elements."""
        return {tag for tag, _ in self.elements}
