"""The last step of every page: nothing in it can run, be fetched or be sent, and no broken number can be read.

An allow-list, so that what nobody thought of is dropped too. Elements and attributes that are not on it go (a
script's or a frame's content with it), links may only point inside the page, pictures must be in the page, every
`style=` becomes a class, and one style sheet is let through by its hash under a Content-Security-Policy that
forbids everything else (W3C Content Security Policy Level 3, sections 2.3 and 6.6). A pure function of its text.
"""

from __future__ import annotations

import base64
import hashlib
import re
from html import escape
from html.parser import HTMLParser
from typing import Final

from briefkit.errors import BuildError

LARGEST_PAGE: Final = 2_000_000


def _names(text: str) -> frozenset[str]:
    return frozenset(text.split())


_VOID: Final = _names("br hr wbr img meta col")
_HTML: Final = _VOID | _names(
    """html head title style body header footer main nav section article aside div span p h1 h2 h3 h4 h5 h6 a strong em
    b i s u small sub sup abbr code pre kbd samp var cite q dfn del ins time blockquote ul ol li dl dt dd table caption
    colgroup thead tbody tfoot tr th td figure figcaption details summary"""
)
_FRAME: Final = _names("html head title body meta")  # of the page itself, once and in their places
_SVG: Final = _names(
    """svg g path line rect circle ellipse polygon polyline text tspan title desc defs clippath pattern marker image
    lineargradient radialgradient stop"""
)
_GONE_WITH_CONTENT: Final = _names(
    """script style iframe frame frameset object applet template noscript noembed noframes textarea select audio video
    canvas foreignobject math xmp plaintext portal"""
)
_WORDS: Final = _names("id class lang dir title role tabindex alt content name headers")
_PLAIN: Final = _names(
    """width height colspan rowspan scope span start reversed type value datetime open charset
    xmlns x y x1 x2 y1 y2 cx cy r rx ry dx dy d points transform viewbox preserveaspectratio fill fill-opacity
    fill-rule stroke stroke-width stroke-dasharray stroke-linecap stroke-linejoin stroke-opacity stroke-miterlimit
    opacity clip-path clip-rule clippathunits patternunits patterntransform patterncontentunits gradientunits
    gradienttransform offset stop-color stop-opacity marker-start marker-mid marker-end markerwidth markerheight
    markerunits orient refx refy font-size font-weight font-style font-variant text-anchor dominant-baseline
    letter-spacing textlength lengthadjust image-rendering shape-rendering vector-effect focusable"""
)
# The parser gives names in lower case; SVG readers other than browsers want their capitals.
_CAPITALS: Final = {
    name.lower(): name
    for name in _names(
        """clipPath linearGradient radialGradient viewBox preserveAspectRatio clipPathUnits patternUnits
        patternTransform patternContentUnits gradientUnits gradientTransform markerWidth markerHeight markerUnits refX
        refY textLength lengthAdjust"""
    )
}
_GEOMETRY: Final = _names(
    "x y x1 x2 y1 y2 cx cy r rx ry dx dy d points transform viewbox width height offset refx refy"
)
_DATA_PICTURE: Final = re.compile(r"data:image/(?:png|jpeg|gif|webp);base64,[A-Za-z0-9+/=]+", re.ASCII)
_INSIDE: Final = re.compile(r"#[A-Za-z0-9_.:\-]+", re.ASCII)
_NEIGHBOUR: Final = re.compile(r"#[A-Za-z0-9_.:\-]+|[A-Za-z0-9][A-Za-z0-9.\-]*\.html", re.ASCII)
_ELSEWHERE: Final = re.compile(r"url\((?!\s*#)|@import|expression\(|javascript:|\\", re.IGNORECASE)
_FETCHES: Final = re.compile(r"url\(|@import|expression\(", re.IGNORECASE)
_DECLARATION: Final = re.compile(r"[a-z\-]+\s*:[^;{}<>@\\]+", re.IGNORECASE)
# What HTML's input stream may not hold (WHATWG HTML 13.2.3.5): controls, half letters, noncharacters.
_NO_LETTER: Final = re.compile(
    "[\x00-\x08\x0b\x0e-\x1f\x7f-\x9f\ud800-\udfff\ufdd0-\ufdef"
    + "".join(chr(plane << 16 | last) for plane in range(17) for last in (0xFFFE, 0xFFFF))
    + "]"
)
_CELLS: Final = _names("td th dd text tspan")
# "None." before another sentence is an answer in words.
_BROKEN_CELL: Final = re.compile(r"\b(?:[nN]a[nN]|NAN|[iI]nf|INF|[iI]nfinity|None(?!\. [A-Z]))\b")
_BROKEN_TEXT: Final = re.compile(r"\b(?:nan|NaN|NAN)\b")
_BROKEN_SHAPE: Final = re.compile(r"nan|inf", re.IGNORECASE)


def harden(page: str, *, neighbours: bool = False) -> str:
    """The page with everything dropped that could run, fetch or send, and its Content-Security-Policy first in head.

    Idempotent. `neighbours` lets links point to pages of the same folder too (an index). Raises:
        BuildError: a table, list or drawing holds a number that is not one (nan, inf, None); the style sheet would
            fetch something; the page is larger than `LARGEST_PAGE` bytes; it has no head or no style sheet.
    """
    cleaner = _Cleaner(_NEIGHBOUR if neighbours else _INSIDE)
    cleaner.feed(page)
    cleaner.close()
    hardened = cleaner.page()
    size = len(hardened.encode("utf-8"))
    if size > LARGEST_PAGE:
        raise BuildError(f"the page would be {size:,} bytes, more than {LARGEST_PAGE:,}; use fewer or smaller pictures")
    return hardened


class _Cleaner(HTMLParser):
    """Writes again only what the lists above permit."""

    _HEAD_MARK = "\0head"  # cannot come from a page: NUL is taken out of all text

    def __init__(self, links: re.Pattern[str]) -> None:
        super().__init__(convert_charrefs=True)
        self._links = links
        self._out: list[str] = []
        self._open: list[str] = []
        self._dropping: list[str] = []
        self._style: str | None = None
        self._classes: dict[str, str] = {}

    def page(self) -> str:
        """The finished page; its style sheet is complete only now, so its hash is taken only now."""
        if self._HEAD_MARK not in self._out or self._style is None:
            raise BuildError("the page has no head with a style sheet; the handout template is damaged")
        if _FETCHES.search(self._style):
            raise BuildError("the page's style sheet would fetch something; the handout template is damaged")
        rules = [f".{name}{{{text}}}" for name, text in sorted(self._classes.items())]
        style = _NO_LETTER.sub("\ufffd", "\n".join([self._style.rstrip("\n"), *rules]) + "\n")
        digest = base64.b64encode(hashlib.sha256(style.encode("utf-8")).digest()).decode("ascii")
        policy = f"default-src 'none'; style-src 'sha256-{digest}'; img-src data:; base-uri 'none'; form-action 'none'"
        head = f'\n<meta http-equiv="Content-Security-Policy" content="{policy}">\n'
        body = "".join(head if part == self._HEAD_MARK else part for part in self._out)
        ends = "".join(f"</{tag}>" for tag in reversed(self._open) if tag != "style")
        whole = body.replace("\0style", style).strip() + ends
        return "<!DOCTYPE html>\n" + _NO_LETTER.sub("\ufffd", whole) + "\n"

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self._start(tag, attrs, closed=False)

    def handle_startendtag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self._start(tag, attrs, closed=True)

    def _start(self, tag: str, attrs: list[tuple[str, str | None]], *, closed: bool) -> None:
        if self._dropping:
            if tag == self._dropping[0] and not closed:
                self._dropping.append(tag)
            return
        drawing = "svg" in self._open
        if tag == "style" and not drawing and "head" in self._open and self._style is None:
            self._style = ""
            self._open.append(tag)
            self._out.append("<style>\0style</style>")
            return
        if tag in _GONE_WITH_CONTENT:
            if not closed:
                self._dropping.append(tag)
            return
        if tag not in (_SVG if drawing or tag == "svg" else _HTML):
            return
        if tag in _FRAME and "body" in self._open and not drawing:
            return
        if tag == "meta" and any(name == "http-equiv" for name, _ in attrs):
            return
        kept = self._attributes(tag, attrs, drawing=drawing or tag == "svg")
        if tag in ("img", "image") and not any(text.startswith((" src=", " href=")) for text in kept):
            return
        ends = closed and (drawing or tag == "svg")
        self._out.append(f"<{_CAPITALS.get(tag, tag)}{''.join(kept)}{'/' if ends else ''}>")
        if tag == "head":
            self._out.append(self._HEAD_MARK)
        if not ends and tag not in _VOID:
            self._open.append(tag)

    def handle_endtag(self, tag: str) -> None:
        if self._dropping:
            if tag == self._dropping[0]:
                self._dropping.pop()
            return
        if tag not in self._open or tag in ("body", "html"):  # a page ends where it ends: see page()
            return
        while self._open:  # close what was left open inside, so that the page stays well nested
            inner = self._open.pop()
            if inner != "style":
                self._out.append(f"</{_CAPITALS.get(inner, inner)}>")
            if inner == tag:
                return

    def handle_data(self, data: str) -> None:
        if self._dropping:
            return
        if self._open and self._open[-1] == "style":
            self._style = (self._style or "") + data
            return
        text = data.replace("\0", "")
        if self._out and self._out[-1] == self._HEAD_MARK:
            text = text.lstrip()  # the policy brings its own line, also when it is written again
        if not text:
            return
        in_cell = any(tag in _CELLS for tag in self._open)
        broken = (_BROKEN_CELL if in_cell else _BROKEN_TEXT).search(text)
        if broken:
            raise BuildError(f"{text.strip()[:60]!r}: {broken[0]!r} is not a number a crew may read")
        self._out.append(escape(text, quote=False))

    def _attributes(self, tag: str, attrs: list[tuple[str, str | None]], *, drawing: bool) -> list[str]:
        kept: dict[str, str] = {}
        for name, raw in attrs:
            value = (raw or "").replace("\0", "")
            if drawing and name in _GEOMETRY and _BROKEN_SHAPE.search(value):
                raise BuildError(f"a drawing holds {name}={value[:40]!r}, which is not a number")
            if name == "style":
                name, value = "class", " ".join(part for part in (kept.pop("class", ""), self._class(value)) if part)
            elif name == "class" and "class" in kept:
                value = f"{value} {kept.pop('class')}"
            elif name in ("href", "src", "xlink:href"):
                name = "src" if name == "src" else "href"
                if not self._may_point(tag, value):
                    continue
            elif not self._may_stand(name, value):
                continue
            if name != "class" or value:
                kept.setdefault(name, value)
        return [f' {_CAPITALS.get(name, name) if drawing else name}="{escape(text)}"' for name, text in kept.items()]

    @staticmethod
    def _may_stand(name: str, value: str) -> bool:
        if name in _PLAIN:
            return not _ELSEWHERE.search(value)
        return name in _WORDS or name.startswith("aria-")

    def _may_point(self, tag: str, value: str) -> bool:
        if tag in ("img", "image"):
            return bool(_DATA_PICTURE.fullmatch(value))
        return tag == "a" and bool(self._links.fullmatch(value))

    def _class(self, style: str) -> str:
        """A class that says what a style attribute said; declarations that are not plain are dropped."""
        parts = [part.strip() for part in style.split(";")]
        plain = [part for part in parts if _DECLARATION.fullmatch(part) and not _ELSEWHERE.search(part)]
        if not plain:
            return ""
        text = ";".join(plain)
        name = "k" + hashlib.sha256(text.encode("utf-8")).hexdigest()[:8]
        self._classes[name] = text
        return name
