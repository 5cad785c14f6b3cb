"""Every form that DEVELOPERS.md describes loads as it stands there, and is read as its comment says.

The blocks are taken from the page itself, from its mark to the next heading; each replaces the tables of the invented
2T's file, or of the operation, that it gives.
"""

from __future__ import annotations

import re
from pathlib import Path

import pytest

from briefkit import units
from briefkit.aircraft.load import load_configurations
from briefkit.aircraft.operation import load_operation
from briefkit.units import KNOT

MARK = "<!-- chart forms -->"
PAGE = (Path(__file__).parents[2] / "DEVELOPERS.md").read_text(encoding="utf-8")
BLOCKS = re.findall(r"^```toml\n(.*?)^```$", PAGE.partition(MARK)[2].partition("\n## ")[0], re.MULTILINE | re.DOTALL)
_HEADER = re.compile(r"^\[([^\[\]]+)\]", re.MULTILINE)
_READ = re.compile(r"^\[+[^\]]+\]+ +# (?:(?P<name>[a-z ]+), )?(?P<at>.* ft, .*): (?P<speed>[\d.]+)$", re.MULTILINE)
_CSV = "mach, alpha_deg, cl, cd\n" + "\n".join(f"{m}, {a}, {a / 10}, 0.01" for m in (0.2, 0.8) for a in (-6, 0, 16))


def merged(text: str, block: str) -> str:
    """The file with the block's tables in the place of its own of that name, and the block's entries added."""
    for name in _HEADER.findall(block):
        text = re.sub(rf"^\[{re.escape(name)}\].*?(?=^\[|\Z)", "", text, flags=re.MULTILINE | re.DOTALL)
    return f"{text}\n{block}"


def test_the_page_has_its_forms() -> None:
    assert len(BLOCKS) >= 17
    words = ("chart", "lines", "base", "less", "cap", "DA ft", "≤", "%", "to_height", "[[configuration]]", "[[hover]]")
    more = ("[[manual.speeds]]", "fuel_burn", "[section]", "none in manual", "more_than_two_variables", "reading_error")
    for word in words + more:
        assert any(word in block for block in BLOCKS), word


@pytest.mark.parametrize("block", BLOCKS, ids=lambda block: " ".join(block.split()[:3]))
def test_each_form_loads_and_is_read_as_it_says(block: str, examples: Path, tmp_path: Path) -> None:
    if "# operation" in block:
        text = (examples / "operation.toml").read_text(encoding="utf-8")
        (tmp_path / "operation.toml").write_text(merged(text.partition("[[legs]]")[0], block), encoding="utf-8")
        operation = load_operation(tmp_path)
        assert [leg.burn.text for leg in operation.legs] == ["66 lb/h"]
        return
    (tmp_path / "section.csv").write_text(_CSV, encoding="utf-8")
    text = (examples / "aircraft" / "pelquill-2t.toml").read_text(encoding="utf-8")
    (tmp_path / "type.toml").write_text(merged(text, block), encoding="utf-8")
    known = load_configurations(tmp_path / "type.toml")
    says = _READ.search(block)
    if "vne." in block or "configuration" in block:
        assert says, "a form of VNE says in its comment what is read where"
    if says is None:
        return
    aircraft = known[says["name"]] if says["name"] else next(iter(known.values()))
    at = {quantity(part): part for part in says["at"].split(", ")}
    height, oat = units.read(at["height"], "height"), units.read(at["temperature"], "temperature")
    mass = units.read(at.get("mass", aircraft.limits.max_mass.text), "mass")
    speed = float(aircraft.vne.indicated(height, oat, mass, units.read(at.get("ratio", "100 %"), "ratio")))
    if "[vne.power_off]" in block:
        speed = float(aircraft.vne_off.indicated(speed, height, oat, mass))
    assert speed / KNOT == pytest.approx(float(says["speed"]), abs=0.01)


def quantity(part: str) -> str:
    """Which quantity a part of a comment is, by its unit."""
    return {"ft": "height", "degC": "temperature", "lb": "mass", "%": "ratio"}[part.split()[-1]]
