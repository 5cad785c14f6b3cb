"""Nothing on a page can run, be fetched or be sent; no broken number can be read."""

from __future__ import annotations

import base64
import hashlib
import html
import re
import warnings

import html5lib
import pytest
from hypothesis import given
from hypothesis import strategies as st

from briefkit.brief import harden as room
from briefkit.brief.harden import harden
from briefkit.errors import BuildError

PIXEL = "data:image/png;base64,iVBORw0KGgo="


def page(body: str, style: str = "p { color: black }") -> str:
    head = f"<meta charset='utf-8'><title>A page</title><style>{style}</style>"
    return f"<!DOCTYPE html><html lang='en'><head>{head}</head><body>{body}</body></html>"


def body_of(hardened: str) -> str:
    match = re.search(r"<body>(.*)</body>", hardened, re.DOTALL)
    assert match is not None
    return match[1]


def test_the_policy_stands_first_and_its_hash_is_that_of_the_one_style_sheet():
    """W3C CSP Level 3, 6.6.3.1: the hash is of the text of the style element, byte for byte."""
    hardened = harden(page("<p style='text-align: right'>a</p>"))
    first = re.search(r"<head>\s*(<[^>]*>)", hardened)
    assert first is not None
    styles = re.findall(r"<style>(.*?)</style>", hardened, re.DOTALL)
    assert len(styles) == 1
    digest = base64.b64encode(hashlib.sha256(styles[0].encode()).digest()).decode()
    policy = f"default-src 'none'; style-src 'sha256-{digest}'; img-src data:; base-uri 'none'; form-action 'none'"
    assert html.unescape(first[1]) == f'<meta http-equiv="Content-Security-Policy" content="{policy}">'


HOSTILE = {
    "script": ("<p>a</p><script>alert(1)</script><p>b</p>", "<p>a</p><p>b</p>"),
    "script in capitals": ("<SCRIPT SRC=x.js></SCRIPT>a", "a"),
    "script inside a drawing": ("<svg><script>alert(1)</script><path d='M0 0'/></svg>", '<svg><path d="M0 0"/></svg>'),
    "frame": ("<iframe src='x'>inside</iframe>a", "a"),
    "frame in a frame": ("<object><object>x</object>y</object>a", "a"),
    "object and embed": ("<object data='x'>y</object><embed src='x'>a", "a"),
    "style sheet of the author's": ("<style>p { display: none }</style>a", "a"),
    "link and base": ("<link rel='stylesheet' href='x'><base href='x'>a", "a"),
    "refresh": ("<meta http-equiv='refresh' content='0'>a", "a"),
    "form": ("<form action='x'>a<input name='b'><button>c</button></form>", "ac"),
    "handlers": ("<p onclick='x()' ONLOAD=x>a</p>", "<p>a</p>"),
    "handler on a drawing": ("<svg onload='x()'><g/></svg>", "<svg><g/></svg>"),
    "link elsewhere": ("<a href='https://example.invalid/x'>a</a>", "<a>a</a>"),
    "link to a file": ("<a href='other.html'>a</a>", "<a>a</a>"),
    "link that runs": ("<a href=' java\tscript:x()'>a</a>", "<a>a</a>"),
    "link inside": ("<a href='#page-2'>a</a>", '<a href="#page-2">a</a>'),
    "link in a drawing": ("<svg><a href='x'><path d='M0 0'/></a></svg>", '<svg><path d="M0 0"/></svg>'),
    "picture elsewhere": ("<img src='https://example.invalid/x.png' alt='x'>a", "a"),
    "picture beside": ("<img src='x.png' alt='x'>a", "a"),
    "picture in the page": (f"<img src='{PIXEL}' alt='x'>", f'<img src="{PIXEL}" alt="x">'),
    "drawing as picture data": ("<img src='data:image/svg+xml;base64,PHN2Zz4=' alt='x'>a", "a"),
    "picture set elsewhere": ("<img src='" + PIXEL + "' srcset='x.png 2x' alt='x'>", f'<img src="{PIXEL}" alt="x">'),
    "picture in a drawing": (f"<svg><image xlink:href='{PIXEL}'/></svg>", f'<svg><image href="{PIXEL}"/></svg>'),
    "picture elsewhere in a drawing": ("<svg><image href='x.png'/><g/></svg>", "<svg><g/></svg>"),
    "use elsewhere": ("<svg><use href='x.svg#a'/><g/></svg>", "<svg><g/></svg>"),
    "animation": ("<svg><animate attributeName='href' to='x'/><set/><g/></svg>", "<svg><g/></svg>"),
    "html in a drawing": ("<svg><foreignObject><p>x</p></foreignObject><p>y</p></svg>", "<svg>y</svg>"),
    "paint from elsewhere": (
        "<svg><g fill='url(x.svg#a)' stroke='url(#hatch)'/></svg>",
        '<svg><g stroke="url(#hatch)"/></svg>',
    ),
    "comment, instruction": ("<!-- a --><?php x ?>b<![CDATA[c]]>", "b"),
    "picture as a background": (
        "<table background='x.png'><tr><td>a</td></tr></table>",
        "<table><tr><td>a</td></tr></table>",
    ),
    "video": ("<video src='x' poster='y'>z</video>a", "a"),
    "a page in the page": (
        "<body class='x'><title>x</title><meta name='x' content='y'>a</body></html><p>b</p>",
        "xa<p>b</p>",
    ),
    "what the author left open": ("<div><p>a<b>b</div>", "<div><p>a<b>b</b></p></div>"),
    "an end without a start": ("a</main></div>b", "ab"),
    "text that looks like code": ("&lt;script&gt; 3 &lt; 4 &amp; so", "&lt;script&gt; 3 &lt; 4 &amp; so"),
    "words with quotes": ("<p title='a &quot;b&quot;'>c</p>", '<p title="a &quot;b&quot;">c</p>'),
}


@pytest.mark.parametrize("case", HOSTILE, ids=str)
def test_what_may_stand(case):
    given_body, wanted = HOSTILE[case]
    hardened = harden(page(given_body))
    assert body_of(hardened) == wanted
    assert harden(hardened) == hardened


def test_a_style_attribute_becomes_a_class_that_fetches_nothing():
    hardened = harden(page("<td class='a' style='text-align:right; background:url(x.png); color: r\\65 d'>b</td>"))
    cell = re.search(r'<td class="a (k\w+)">b</td>', hardened)
    assert cell is not None
    assert f".{cell[1]}{{text-align:right}}" in hardened
    assert "x.png" not in hardened
    assert "style=" not in hardened
    assert '<td class="a">' in harden(page("<td class='a' style='behavior:url(x)'>b</td>"))


def test_an_index_may_point_to_its_neighbours_only():
    links = "<a href='NB-1.html'>a</a><a href='../x.html'>b</a><a href='//x.html'>c</a><a href='x.html?y'>d</a>"
    assert body_of(harden(page(links), neighbours=True)) == '<a href="NB-1.html">a</a><a>b</a><a>c</a><a>d</a>'
    assert "href" not in body_of(harden(page(links)))


@pytest.mark.parametrize(
    "body",
    [
        "<table><tr><td>nan</td></tr></table>",
        "<table><tr><td>96.4 to NaN KIAS</td></tr></table>",
        "<table><tr><th>-inf</th></tr></table>",
        "<table><tr><td>None</td></tr></table>",
        "<table><tr><td>VNE less None.</td></tr></table>",
        "<table><tr><td><b>None kt</b></td></tr></table>",
        "<dl><dd>nan kt</dd></dl>",
        "<p>onset at nan KIAS</p>",
        "<svg><text>Infinity</text></svg>",
        "<svg><path d='M0 0LNaN,3'/></svg>",
        "<svg><rect x='inf'/></svg>",
        "<svg viewBox='0 0 nan 3'></svg>",
    ],
)
def test_a_number_that_is_not_one_stops_the_page(body):
    """G32."""
    with pytest.raises(BuildError, match="not a number"):
        harden(page(body))


@pytest.mark.parametrize(
    "body",
    [
        "<table><tr><td>none in manual</td></tr></table>",
        "<table><tr><td>None. The load decides.</td></tr></table>",
        "<p>None of this is a target. Information, finance, Nanaimo, 29.92 inHg.</p>",
        "<table><tr><td>29.92 inHg, inflow, banana</td></tr></table>",
        "<svg><g class='nan'/><text>inflow</text></svg>",
    ],
)
def test_words_that_only_look_like_it_may_stand(body):
    assert body_of(harden(page(body))) == body.replace("'", '"')


def test_drawings_keep_their_capitals():
    """For readers that parse a drawing as XML; a browser would mend them."""
    drawing = '<svg viewBox="0 0 1 1"><clipPath id="c"><rect x="0"/></clipPath><g clip-path="url(#c)"/></svg>'
    assert body_of(harden(page(drawing))) == drawing


@pytest.mark.parametrize("style", ["p{background:url(x.png)}", "@import 'x';", "@font-face{src:URL(x)}"])
def test_a_style_sheet_that_would_fetch_is_refused(style):
    with pytest.raises(BuildError, match="style sheet would fetch"):
        harden(page("a", style))


def test_a_page_without_a_head_or_too_large_is_refused(monkeypatch):
    with pytest.raises(BuildError, match="no head with a style sheet"):
        harden("<p>a</p>")
    monkeypatch.setattr(room, "LARGEST_PAGE", 500)
    assert harden(page("a"))
    with pytest.raises(BuildError, match=r"the page would be [\d,]+ bytes, more than 500; use fewer or smaller"):
        harden(page("a" * 500))


PIECES = st.sampled_from(
    [
        "<", ">", "</", "/>", "'", '"', "=", " ", "&", ";", "!--", "-->", "script", "svg", "style", "p", "a", "img",
        "td",
        "iframe", "title", "href", "src", "onload", "javascript:", "data:image/png;base64,AA==", "#x", "url(x)",
        "http-equiv", "meta", "x", "\0", "é", "]]>", "math", "template", "class",
    ]
)  # fmt: skip


@pytest.mark.slow
@given(st.lists(PIECES, max_size=40).map("".join))
def test_whatever_is_written_nothing_runs_and_hardening_is_final(written):
    hardened = harden(page(written))
    assert harden(hardened) == hardened
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        tree = html5lib.parse(hardened, namespaceHTMLElements=False)
    allowed = {name.lower() for name in room._HTML | room._SVG}
    for node in tree.iter():
        if not isinstance(node.tag, str):
            raise AssertionError(f"a comment or instruction: {node!r}")
        assert node.tag.split("}")[-1].lower() in allowed
        for name, value in node.attrib.items():
            assert not str(name).lower().startswith("on")
            assert str(name).lower() not in ("style", "srcset", "srcdoc", "action", "formaction")
            if str(name).endswith(("href", "src")):
                assert value.startswith(("#", "data:image/"))
    assert len(tree.findall(".//style")) == 1
