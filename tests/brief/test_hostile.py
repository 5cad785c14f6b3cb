"""500 hostile strings, in every text field of a brief in turn: nothing of them runs, fetches or breaks the page."""

from __future__ import annotations

import re
import warnings
from typing import Any

import hostile
import html5lib
import pytest

from briefkit.brief.identity import load_brief

pytestmark = pytest.mark.slow

_NEVER = {
    "script", "iframe", "frame", "object", "embed", "link", "base", "form", "input", "button", "textarea", "select",
    "math", "foreignobject", "use", "animate", "set", "template", "noscript", "xmp", "plaintext", "audio",
    "video", "source",
}  # fmt: skip


@pytest.fixture(scope="module")
def brief(examples):
    return load_brief(examples / "ysbrane-4h")


@pytest.fixture(scope="module")
def pages(brief) -> list[tuple[str, list[str]]]:
    return list(hostile.pages(brief))


def test_500_strings_meet_every_text_field_in_at_most_40_pages(brief, pages):
    strings = [string for one in hostile.CLASSES.values() for string in one]
    assert len(strings) == len(set(strings)) == 500
    assert len(pages) <= 40
    assert hostile.count(brief) > 200
    assert set(strings) <= {string for _, used in pages for string in used}
    # turn by turn a field meets another class, and after the last turn it has met them all
    of = {string: name for name, one in hostile.CLASSES.items() for string in one}
    for place in range(hostile.count(brief)):
        assert len({of[used[place]] for _, used in pages}) == len(hostile.CLASSES)


def elements(tree: Any) -> list[Any]:
    return [node for node in tree.iter() if isinstance(node.tag, str)]


def test_every_page_is_valid_and_holds_nothing_that_runs_or_fetches(pages):
    for page, _ in pages:
        with warnings.catch_warnings():
            warnings.simplefilter("ignore", DeprecationWarning)
            tree = html5lib.HTMLParser(strict=True, namespaceHTMLElements=False).parse(page)
        found = elements(tree)
        assert len(found) > 300
        assert sum(node.tag == "style" for node in found) == 1
        assert sum(node.tag == "meta" and "http-equiv" in node.attrib for node in found) == 1
        for node in found:
            assert node.tag.rpartition("}")[2].lower() not in _NEVER
            for name, value in node.attrib.items():
                name = str(name).lower()
                assert not name.startswith("on")
                assert name not in ("style", "srcset", "action", "formaction", "background", "ping", "poster")
                if "href" in name:
                    assert re.fullmatch(r"#[A-Za-z0-9_.:\-]+", value)
                if name == "src":
                    assert value.startswith("data:image/")


def test_the_words_are_still_there_to_be_read(pages):
    """Escaped, not dropped: a name with an angle bracket in it prints as it was typed."""
    shown = 0
    for page, used in pages:
        with warnings.catch_warnings():
            warnings.simplefilter("ignore", DeprecationWarning)
            tree = html5lib.parse(page, namespaceHTMLElements=False)
        text = re.sub(r"\s+", " ", "".join(tree.find("body").itertext()))
        heading = used[1]  # the document's title, which stands in the control sheet
        title = re.sub(r"[\s\0]+", " ", heading).strip()
        shown += title in text
    assert shown >= len(pages) - 1  # control letters alone may be shown as something else


def test_the_margin_boxes_hold_one_string_each(pages):
    """A document number cannot end the CSS string it stands in."""
    for page, _ in pages:
        style = re.search(r"<style>(.*?)</style>", page, re.DOTALL)
        assert style is not None
        boxes = re.findall(r"@top-left \{ content: (.*) \}", style[1])
        assert len(boxes) == 1
        assert re.fullmatch(r'"(?:[A-Za-z0-9 ]|\\[0-9a-f]{1,6} )*";', boxes[0])


def test_a_half_letter_from_a_notebook_is_refused_or_replaced(brief):
    """JSON may hold half of a surrogate pair, which no page can be written with."""
    from briefkit.brief.crew_page import crew_page
    from briefkit.brief.export import compose
    from briefkit.brief.run import Ran, Words

    page = compose(crew_page(brief, "0"), Ran((Words("x", "half \ud83d letter", {}),), ()), brief.identity.folder)
    assert "half \ufffd letter" in page.encode("utf-8").decode("utf-8")
