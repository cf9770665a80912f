"""Makes matplotlib's SVG fit for a report page: the one cleaning function for every figure.

What goes in differs between two runs, carries outside addresses, style sheets and a document type, and says
nothing to a screen reader. What comes out is the same for the same picture, has presentation attributes only,
ids that are unique on the page, a title and a sentence that says what the figure shows.
"""

from __future__ import annotations

import re
from xml.etree import ElementTree as Tree

from outcomes.figures.palette import ALLOWED
from outcomes.tables.table import check_key

SVG = "http://www.w3.org/2000/svg"
_XLINK_HREF = "{http://www.w3.org/1999/xlink}href"
_SERIF = "Charter, Georgia, 'Times New Roman', Times, serif"
_PROPERTIES = {
    *("fill", "fill-opacity", "fill-rule", "stroke", "stroke-width", "stroke-dasharray", "stroke-dashoffset"),
    *("stroke-linecap", "stroke-linejoin", "stroke-miterlimit", "stroke-opacity", "opacity", "clip-path"),
    *("text-anchor", "font-size", "font-style", "font-weight"),
}
_ELEMENTS = {"svg", "g", "path", "text", "tspan", "use", "defs", "clipPath", "rect", "line", "circle"}
_KEPT = _PROPERTIES | {"x", "y", "width", "height", "d", "transform", "viewBox", "id", "href"}
_REFERENCE = re.compile(r"url\(#([^)]+)\)")
_COLOUR = re.compile(r"#[0-9a-fA-F]{3,8}")
_FONT = re.compile(r"(?:(italic|oblique|normal)\s+)?(?:(bold|\d{3})\s+)?([\d.]+)px\s+.*")


def clean_svg(raw: str, key: str, title: str, description: str) -> str:
    """The figure as an `<svg>` element for a page.

    raw: as matplotlib wrote it with svg.fonttype "none". key: of the figure; the prefix of every id.
    ValueError for an element, property, colour or outside reference that no figure of ours uses.
    """
    root = Tree.fromstring(raw)
    prefix = f"f-{check_key(key)}"
    _drop_unknown(root)
    for element in root.iter():
        _to_attributes(element)
    _renumber(root, prefix)
    _name(root, prefix, title, description)
    Tree.register_namespace("", SVG)
    return Tree.tostring(root, encoding="unicode", short_empty_elements=True)


def _local(element: Tree.Element) -> str:
    return str(element.tag).rpartition("}")[2]


def _drop_unknown(parent: Tree.Element) -> None:
    """Metadata and style blocks go; comments were dropped by the parser. Nothing unknown may remain."""
    for child in list(parent):
        if _local(child) in ("metadata", "style"):
            parent.remove(child)
            continue
        if _local(child) not in _ELEMENTS:
            raise ValueError(f"a figure does not use the element {_local(child)}")
        _drop_unknown(child)
        if _local(child) == "defs" and not len(child):
            parent.remove(child)


def _to_attributes(element: Tree.Element) -> None:
    """Style declarations become attributes; attributes outside the list go; colours are checked."""
    if _XLINK_HREF in element.attrib:
        element.set("href", element.attrib.pop(_XLINK_HREF))
    for name, value in _declarations(element.attrib.pop("style", "")):
        element.set(name, value)
    for name in [name for name in element.attrib if name not in _KEPT]:
        del element.attrib[name]
    for name, value in element.attrib.items():
        _check(name, value)
        element.set(name, " ".join(value.split()))
    if element.get("transform", "").startswith("rotate(-0 "):
        del element.attrib["transform"]


def _declarations(style: str) -> list[tuple[str, str]]:
    found: list[tuple[str, str]] = []
    for part in style.split(";"):
        name, _, value = (piece.strip() for piece in part.partition(":"))
        if name == "font":
            found += _font(value)
        elif name == "font-family":
            continue
        elif name in _PROPERTIES:
            found.append((name, value))
        elif name:
            raise ValueError(f"a figure does not use the property {name}")
    return found


def _font(value: str) -> list[tuple[str, str]]:
    """The size, slant and weight of a font declaration; the family is set once for the whole figure."""
    match = _FONT.fullmatch(value)
    if match is None:
        raise ValueError("a font declaration that cannot be read")
    slant, weight, size = match.groups()
    out = [("font-size", size)]
    if slant in ("italic", "oblique"):
        out.append(("font-style", "italic"))
    if weight:
        out.append(("font-weight", weight))
    return out


def _check(name: str, value: str) -> None:
    if name == "href" and not value.startswith("#"):
        raise ValueError("a figure refers to nothing outside itself")
    if "url(" in value and not _REFERENCE.fullmatch(value):
        raise ValueError("a figure refers to nothing outside itself")
    if name in ("fill", "stroke"):
        for colour in _COLOUR.findall(value):
            if colour.lower() not in ALLOWED:
                raise ValueError(f"the colour {colour} is not in the palette")


def _renumber(root: Tree.Element, prefix: str) -> None:
    """Ids that something refers to become prefix-1, prefix-2 … in order of use; all others go."""
    new: dict[str, str] = {}
    for element in root.iter():
        for name, value in element.attrib.items():
            old = value[1:] if name == "href" else "".join(_REFERENCE.findall(value))
            if old:
                new.setdefault(old, f"{prefix}-{len(new) + 1}")
                element.set(name, f"#{new[old]}" if name == "href" else f"url(#{new[old]})")
    for element in root.iter():
        old = element.attrib.pop("id", "")
        if old in new:
            element.set("id", new[old])


def _name(root: Tree.Element, prefix: str, title: str, description: str) -> None:
    """Role, title and description; size by viewBox only, so that the page decides how wide the figure is."""
    for name in ("width", "height"):
        root.attrib.pop(name, None)
    root.set("role", "img")
    root.set("aria-labelledby", f"{prefix}-title {prefix}-desc")
    root.set("font-family", _SERIF)
    root.set("stroke-linejoin", "round")
    root.set("stroke-linecap", "butt")
    for place, (name, text) in enumerate((("title", title), ("desc", description))):
        node = Tree.Element(f"{{{SVG}}}{name}", {"id": f"{prefix}-{name}"})
        node.text = text
        node.tail = "\n"
        root.insert(place, node)
