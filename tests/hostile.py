"""500 hostile strings in 20 classes, and the pages of an invented brief whose every text is one of them.

Written from the HTML standard's tokenizer states (WHATWG HTML, section 13.2.5) and CSS Syntax Level 3: each class tries
to leave another context. `pages` spreads them so that every text field meets every class.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import fields, is_dataclass, replace
from typing import Any

from briefkit.brief.crew_page import crew_page
from briefkit.brief.export import compose
from briefkit.brief.identity import Brief
from briefkit.brief.prose import set_words
from briefkit.brief.run import Picture, Ran, Words
from briefkit.errors import BuildError
from briefkit.figures.stairs import stairs_figure
from briefkit.figures.still import Drawing, StillParts, Table, still

_AROUND = ("{}", "A {} B", '">{}', "'>{}<b", "\n{}\t")

_SEEDS = {
    "script": (
        "<script>ran()</script>", "<ScRiPt src=//x.invalid/a.js>", "<script/x>ran()//", "<<script>ran()<</script>",
        "<scr<script>ipt>ran()</script>",
    ),
    "handler": (
        "<img src=x onerror=ran()>", "<body onload=ran()>", "<p onmouseover=ran()>",
        "<details open ontoggle=ran()>", "<input autofocus onfocus=ran()>",
    ),
    "attribute": (
        '" onload="ran()', "' onload='ran()", "` onload=`ran()", 'x" style="position:fixed', '"/><img src=x id="',
    ),
    "closing": (
        "</td></tr></table>", "</title>", "</body></html>", "</section></article></main>", "</p></figure></svg>",
    ),
    "comment": (
        "<!-- ", " -->", "<![CDATA[ x ]]>", "<!--><script>ran()</script>", "<?xml x ?><!DOCTYPE x>",
    ),
    "link": (
        "javascript:ran()", "<a href='java&#10;script:ran()'>x</a>", "data:text/html,<script>ran()</script>",
        "<a href=//x.invalid>x</a>", "vbscript:ran()",
    ),
    "style": (
        "</style><style>*{display:none}", "url(//x.invalid/a)", "@import '//x.invalid'", "x{}</style>",
        "<link rel=stylesheet href=//x.invalid>",
    ),
    "css string": (
        '"; } * { display: none } @page { x: "', "\\22 ; content: url(//x.invalid)", "\\", "\\a \\d \\c", '"\\',
    ),
    "entity": (
        "&lt;script&gt;", "&#60;script&#62;ran()", "&nosuch;", "&amp;lt;", "&#x0;&#xD800;&#1114112;",
    ),
    "template": (
        "{{ 7 * 7 }}", "{% include 'x' %}", "${ran()}", "<%= ran() %>", "{# x #}{{ page.__class__ }}",
    ),
    "frame": (
        "<iframe src=//x.invalid>", "<object data=//x.invalid>", "<embed src=//x.invalid>",
        "<meta http-equiv=refresh content='0;//x.invalid'>", "<base href=//x.invalid>",
    ),
    "form": (
        "<form action=//x.invalid><button>", "<input type=image src=//x.invalid>", "<textarea>",
        "<select><option>", "<button formaction=//x.invalid>",
    ),
    "drawing": (
        "<svg><script>ran()</script></svg>", "<svg><foreignObject><script>ran()", "<math><mtext><script>ran()",
        "<svg><use href=//x.invalid#a>", "<svg><animate onbegin=ran() attributeName=x>",
    ),
    "letters": (
        "\u202eegap eht", "\u200b\u200d\ufeff", "\uff1cscript\uff1e", "\u2028\u2029", "e\u0301\u0336\U0001f681",
    ),
    "control": (
        "\0", "\x08\x0b\x0c", "\x1b[31m", "\x7f\x9f", "\0head \0style",
    ),
    "long": (
        "x" * 900, "<b>" * 90, "&" * 400, "wide " * 200, '"' * 400,
    ),
    "space": (
        " ", "\r\n\r\n", "\t\t", "\u00a0", "a\u2003\u3000b",
    ),
    "path": (
        "../../../etc/passwd", "file:///etc/passwd", "C:\\x\\y", "\\\\x.invalid\\y", "<img src=../../x.png>",
    ),
    "own marks": (
        "#source-1", '<a href="#source-1">x</a>', "source-1", "</a></caption>", '<tr id="source-1">',
    ),
    "raw text": (
        "<noscript><p title='</noscript><img src=x onerror=ran()>'>", "<plaintext>", "<xmp><script>ran()</script>",
        "<template><script>ran()", "<title><img src=x onerror=ran()>",
    ),
}  # fmt: skip
CLASSES = {name: tuple(around.format(seed) for seed in seeds for around in _AROUND) for name, seeds in _SEEDS.items()}
PAGES = len(CLASSES)

# Not text of a person's: closed lists, paths and keys that lead to other values, digests.
_CLOSED = {
    "units", "applies", "kind", "folder", "operator", "file", "aircraft", "work_area", "data_hash", "unanswered", "key",
    "answers", "content", "signed", "role", "configurations", "refused_serials", "sources",
}  # fmt: skip


def pages(brief: Brief) -> Iterator[tuple[str, list[str]]]:
    """Each page's HTML and the hostile strings that stand on it. Every text field meets every class once."""
    for turn in range(PAGES):
        used: list[str] = []
        dressed = _Dresser(turn, used)
        hostile = Brief(dressed(brief.identity), dressed(brief.aircraft), dressed(brief.operation))
        crew = crew_page(hostile, dressed.next())
        blocks = (*_words(dressed, brief), Picture("y", _picture(dressed)), *_words(dressed, brief))
        ran = Ran(blocks, ())
        yield compose(crew, ran, brief.identity.folder), used


def count(brief: Brief) -> int:
    """How many text fields the pages have."""
    used: list[str] = []
    dressed = _Dresser(0, used)
    dressed(brief.identity), dressed(brief.aircraft), dressed(brief.operation)
    return len(used)


class _Dresser:
    """Gives every text of nested frozen dataclasses a hostile string in its turn."""

    def __init__(self, turn: int, used: list[str]) -> None:
        self._turn, self._used = turn, used

    def next(self) -> str:
        names = list(CLASSES)
        place = len(self._used)
        strings = CLASSES[names[(place + self._turn) % PAGES]]
        # neighbours of one class get different strings, and so does one field on different pages
        self._used.append(strings[(place // PAGES + 3 * self._turn) % len(strings)])
        return self._used[-1]

    def __call__(self, value: Any, name: str = "") -> Any:
        if name in _CLOSED:
            return value
        if type(value) is str:  # an enumeration's member is a closed list
            return self.next() if value else value
        if is_dataclass(value) and not isinstance(value, type):
            changed = {one.name: self(getattr(value, one.name), one.name) for one in fields(value) if one.init}
            return replace(value, **{key: new for key, new in changed.items() if new is not getattr(value, key)})
        if isinstance(value, tuple):
            return tuple(self(one, name) for one in value)
        if isinstance(value, dict):
            return {key: self(one, name) for key, one in value.items()}
        return value


def _words(dressed: _Dresser, brief: Brief) -> tuple[Words, ...]:
    """A cell of the author's; none where the build refuses it with a sentence (a formula, a picture from elsewhere)."""
    cell = Words("x", dressed.next(), {})
    try:
        set_words(cell, brief.identity.folder)
    except BuildError:
        return ()
    return (cell,)


def _picture(dressed: _Dresser) -> str:
    """An exhibit's still with hostile words in all its places."""

    def said() -> str:
        return "x" + dressed.next().replace("\0", "")

    figure = stairs_figure([1.0, 2.0, 3.0], ["1", "2", "3"], [0.0, 5.0], ["a", "b"], step=5.0, speed_words=said())
    table = Table((said(), said()), ((said(), said()),), said())
    parts = StillParts(said(), said(), said(), ((said(), said()),), (Drawing(figure, said(), said()),), table)
    return still(_Parts(parts))


class _Parts:
    def __init__(self, parts: StillParts) -> None:
        self._parts = parts

    def still_parts(self) -> StillParts:
        return self._parts
