"""The author's markdown on the page."""

from __future__ import annotations

import base64

import pytest

from briefkit.brief.prose import set_words
from briefkit.brief.run import Words
from briefkit.errors import BuildError

# The smallest PNG there is: eight bytes of signature are enough for a file that is only carried along.
PNG = b"\x89PNG\r\n\x1a\n"


def words(text: str, **attachments: dict[str, str]) -> Words:
    return Words("the text after code cell 2", text, attachments)


@pytest.mark.parametrize(
    ("text", "part"),
    [
        ("# One", "<h3>One</h3>"),
        ("## Two", "<h4>Two</h4>"),
        ("##### Five", "<h6>Five</h6>"),
        ("a *b* **c**", "<p>a <em>b</em> <strong>c</strong></p>"),
        ("- a\n- b", "<li>a</li>"),
        ("| a | b |\n|---|--:|\n| 1 | 2 |", "<td>1</td>"),
        ("5 \\$ and 6 \\$", "<p>5 $ and 6 $</p>"),
        ("3 < 4 & so", "<p>3 &lt; 4 &amp; so</p>"),
        ("<div>left open", "&lt;div&gt;left open"),
        ("too many ends</div></main>", "too many ends&lt;/div&gt;&lt;/main&gt;"),
        ("<body onload=x()>", "&lt;body onload=x()&gt;"),
    ],
)
def test_markdown(tmp_path, text, part):
    html = set_words(words(text), tmp_path)
    assert part in html
    assert html.startswith('<div class="words">')
    assert html.count("<div") == html.count("</div>")
    assert "</main>" not in html


def test_two_cells_may_carry_the_same_heading(tmp_path):
    assert " id=" not in set_words(words("# One\n\n# One"), tmp_path)


@pytest.mark.parametrize("text", ["$\\mu$", "$$\\mu = 0.3$$", "\\begin{align}a\\end{align}", "```mermaid\na-->b\n```"])
def test_what_needs_a_script_is_refused_by_name(tmp_path, text):
    with pytest.raises(BuildError, match=r"the text after code cell 2: formulas and diagrams .* write them in words"):
        set_words(words(text), tmp_path)


def test_pictures_are_carried_in_the_page(tmp_path):
    (tmp_path / "a b.png").write_bytes(PNG)
    data = "data:image/png;base64," + base64.b64encode(PNG).decode()
    assert f'src="{data}"' in set_words(words("![The strip](a%20b.png)"), tmp_path)
    pasted = {"image/png": base64.b64encode(PNG).decode()}
    assert f'src="{data}"' in set_words(words("![The strip](attachment:x.png)", **{"x.png": pasted}), tmp_path)


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("![](a.png)", "a picture needs words"),
        ("![x](https://example.invalid/a.png)", "is elsewhere; keep it as a file"),
        ("![x](//example.invalid/a.png)", "is elsewhere"),
        ("![x](../secret.png)", "is not a file in the brief's folder"),
        ("![x](gone.png)", "is not a file in the brief's folder"),
        ("![x](a.svg)", "is not PNG, JPEG, GIF or WebP"),
        ("![x](data:image/svg+xml;base64,PHN2Zz4=)", "a pasted picture is not PNG"),
        ("![x](attachment:gone.png)", "missing attachment: gone.png; paste the picture again"),
    ],
)
def test_a_picture_that_would_be_missing_is_refused(tmp_path, text, message):
    (tmp_path.parent / "secret.png").write_bytes(PNG)
    (tmp_path / "a.png").write_bytes(PNG)
    (tmp_path / "a.svg").write_text("<svg/>")
    with pytest.raises(BuildError, match=f"the text after code cell 2: .*{message}"):
        set_words(words(text), tmp_path)
