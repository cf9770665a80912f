"""Reads a page back: elements, ids, headings, pointers and the text of every element with an id."""

from __future__ import annotations

from html.parser import HTMLParser

VOID = {"meta", "br", "link", "img", "input", "hr", "path", "use", "rect", "line", "circle"}


class Reading(HTMLParser):
    """tags: every start tag in order. texts: id → text inside. references: (data-ref, its text)."""

    def __init__(self, page: str) -> None:
        super().__init__(convert_charrefs=True)
        self.tags: list[str] = []
        self.attributes: list[tuple[str, dict[str, str | None]]] = []
        self.ids: list[str] = []
        self.texts: dict[str, str] = {}
        self.references: list[tuple[str, str]] = []
        self.headings: list[tuple[int, str]] = []
        self.visible = ""
        self._open: list[tuple[str, dict[str, str | None], list[str]]] = []
        self.feed(page)
        self.unclosed = [tag for tag, _, _ in self._open]

    def handle_starttag(self, tag, attrs):
        values = dict(attrs)
        self.tags.append(tag)
        self.attributes.append((tag, values))
        if "id" in values:
            self.ids.append(values["id"])
        if tag not in VOID:
            self._open.append((tag, values, []))

    def handle_startendtag(self, tag, attrs):
        self.tags.append(tag)
        self.attributes.append((tag, dict(attrs)))
        if "id" in dict(attrs):
            self.ids.append(dict(attrs)["id"])

    def handle_data(self, data):
        for _, _, pieces in self._open:
            pieces.append(data)
        if not any(tag in ("style", "title") for tag, _, _ in self._open):
            self.visible += data

    def handle_endtag(self, tag):
        opened, values, pieces = self._open.pop()
        if opened != tag:
            raise AssertionError(f"</{tag}> closes <{opened}>")
        text = " ".join("".join(pieces).split())
        if "id" in values:
            self.texts[values["id"]] = text
        if "data-ref" in values:
            self.references.append((values["data-ref"], text))
        if len(tag) == 2 and tag[0] == "h" and tag[1].isdigit():
            self.headings.append((int(tag[1]), text))
