"""What can be seen in a notebook without running it: people's data, pictures without words, what has no still.

A build runs the cells and refuses whatever has no still; this only says so earlier, and never instead.
"""

from __future__ import annotations

import ast
import json
import re
from collections.abc import Iterable, Iterator
from pathlib import Path
from typing import Any, Final

from briefkit.brief.finding import Finding, Level
from briefkit.brief.identity import NOTEBOOK

_EMAIL = re.compile(r"[\w.+%-]+@[\w-]+(?:\.[\w-]+)+")
# Common shapes of telephone numbers (ITU-T E.123 writes +22 607 123 4567 and (0607) 123 4567); common practice beyond.
_PHONE = re.compile(
    r"(?<![\w.,])\+\d{1,3}[ .-]?(?:\(0?\d{1,4}\)|\d{2,4})(?:[ .-]?\d{2,4}){1,4}(?![\w,])"
    r"|(?<!\w)\(0\d{1,4}\)[ .-]?\d{3,4}[ .-]?\d{3,4}(?!\w)"
    r"|(?<![\w.,-])0\d{2,4}[ -]\d{3,4}[ -]?\d{3,4}(?![\w-])"
    r"|(?<![\w.,-])\d{3}[-.]\d{3}[-.]\d{4}(?![\w-])"
    r"|\b(?:tel|telephone|phone|mobile)\b\W{0,3}(?:no\.?|number)?\W{0,3}\d[\d ()-]{4,}",
    re.IGNORECASE,
)
_LEAST_DIGITS: Final = 7
_LICENCE = re.compile(
    r"\b[A-Z]{2,3}[./-]?FCL[./-][A-Z0-9./-]*\d[A-Z0-9./-]*"
    r"|\b(?i:licen[cs]e|ATPL|ATP|CPL|PPL|certificate)(?:\(H\))?\W{0,3}(?i:no\.?|number|holder)?\W{0,3}"
    r"[A-Z]{0,4}[-/. ]?\d{5,}\w*"
)
_LABEL = re.compile(
    r"(?im)^[\s>*_#|-]*(?:\w+[ ])?"
    r"(?:name|pilot|captain|commander|trainee|student|candidate|instructor|examiner|signed by)s?"
    r"[*_]{0,3}[ ]?:[*_]{0,3}[ \t]*(?=[^\W\d_])"
)
_NO_ALT = re.compile(r"!\[\s*\][(\[]")
_IMG = re.compile(r"<img\b[^>]*>", re.IGNORECASE)
_ALT = re.compile(r"\balt\s*=\s*(?:\"\s*[^\s\"]|'\s*[^\s']|[^\s\"'>])", re.IGNORECASE)
_CODE = re.compile(r"```.*?```|`[^`\n]*`", re.DOTALL)
# Packages whose displays are scripts or pictures of their own; none of them has a still.
_NO_STILL: Final = ("matplotlib", "seaborn", "plotly", "altair", "bokeh", "PIL", "pandas", "IPython")
_PLAIN: Final = (
    ast.Constant, ast.JoinedStr, ast.BinOp, ast.BoolOp, ast.Compare, ast.UnaryOp, ast.List, ast.Dict, ast.Set,
    ast.Tuple, ast.ListComp, ast.DictComp, ast.SetComp, ast.Lambda,
)  # fmt: skip
_COMMAND = re.compile(r"(?m)^\s*[%!?]|\?\s*$")


def personal_data(place: str, text: str, *, labels: bool = True) -> list[Finding]:
    """E-mail, telephone and licence shapes and "name:" labels in a text: people are staff codes on a brief."""
    found = [("an e-mail address", match[0]) for match in _EMAIL.finditer(text)]
    numbers = (match[0].strip() for match in _PHONE.finditer(text))
    found += [("a telephone number", number) for number in numbers if sum(map(str.isdigit, number)) >= _LEAST_DIGITS]
    found += [("a licence number", match[0]) for match in _LICENCE.finditer(text)]
    if labels:
        found += [("a label for a person's name", match[0].strip()) for match in _LABEL.finditer(text)]
    remedy = "people are not on a brief: a staff code or a role instead"
    return [Finding(Level.BLOCKS, place, f"{what}: {read[:60]!r}", remedy) for what, read in found]


def notebook_findings(folder: Path) -> list[Finding]:
    """Everything found in a brief's notebook without running it."""
    path = folder / NOTEBOOK
    if not path.is_file():
        return [Finding(Level.BLOCKS, str(path), "no notebook", f"every brief has a {NOTEBOOK} beside its brief.toml")]
    try:
        cells = json.loads(path.read_text(encoding="utf-8"))["cells"]
        sources = [(cell["cell_type"], _source(cell)) for cell in cells]
        stored = any(cell.get("outputs") for cell in cells)
    except (OSError, ValueError, KeyError, TypeError, AttributeError, RecursionError):
        return [Finding(Level.BLOCKS, str(path), "not a notebook that can be read", "save it again from JupyterLab")]
    found = [finding for place, kind, source in _placed(path, sources) for finding in _cell(place, kind, source)]
    if stored:
        remedy = "clear the outputs before you pass the file on"
        found.append(Finding(Level.NOTE, str(path), "outputs are stored in it; a build never reads them", remedy))
    return found


def _source(cell: dict[str, Any]) -> str:
    source = cell["source"]
    return source if isinstance(source, str) else "".join(source)


def _placed(path: Path, sources: Iterable[tuple[str, str]]) -> Iterator[tuple[str, str, str]]:
    """Each cell with its place: code cells as JupyterLab counts them after a run, words by their order."""
    counts = {"code": 0, "markdown": 0}
    for kind, source in sources:
        if kind in counts and source.strip():
            counts[kind] += 1
            yield f"{path}: {'code' if kind == 'code' else 'text'} cell {counts[kind]}", kind, source


def _cell(place: str, kind: str, source: str) -> list[Finding]:
    if kind == "code":
        return personal_data(place, source, labels=False) + _code(place, source)
    found = personal_data(place, source)
    shown = _CODE.sub("", source)
    bare = len(_NO_ALT.findall(shown)) + sum(not _ALT.search(tag) for tag in _IMG.findall(shown))
    if bare:
        remedy = "words for a reader who cannot see it: ![words](file)"
        found.append(Finding(Level.BLOCKS, place, f"{bare} picture{'s' if bare > 1 else ''} without words", remedy))
    return found


def _code(place: str, source: str) -> list[Finding]:
    """What a cell shows that has no still; a cell with commands of the notebook's own is left to a build."""
    try:
        tree = ast.parse(source)
    except (SyntaxError, ValueError, RecursionError, MemoryError) as error:
        if _COMMAND.search(source):
            return []
        said = error.msg if isinstance(error, SyntaxError) else str(error)
        return [Finding(Level.BLOCKS, place, f"not Python: {said}", "run the notebook in JupyterLab")]
    last = tree.body[-1] if tree.body else None
    if not isinstance(last, ast.Expr) or source.rstrip().endswith(";"):
        return []
    remedy = "show an exhibit or a bqplot figure; end the line with a semicolon to show nothing"
    text = f"shows {ast.unparse(last.value)[:40]!r}, which has no still for the page"
    return [Finding(Level.BLOCKS, place, text, remedy)] if _without_still(last.value, _imported(tree)) else []


def _without_still(shown: ast.expr, imported: dict[str, str]) -> bool:
    """Plain values, and what a package draws by itself; a name made by an earlier cell is not looked up."""
    if isinstance(shown, ast.Constant) and shown.value is None:
        return False
    root = shown
    while isinstance(root, ast.Call | ast.Attribute | ast.Subscript):
        root = root.func if isinstance(root, ast.Call) else root.value
    if not isinstance(root, ast.Name):
        return isinstance(shown, _PLAIN)
    if isinstance(shown, ast.Call) and root.id == "display":
        return any(_without_still(argument, imported) for argument in shown.args)
    return imported.get(root.id, "") in _NO_STILL


def _imported(tree: ast.Module) -> dict[str, str]:
    """Names bound by imports, with the package each comes from."""
    names: dict[str, str] = {}
    for node in ast.walk(tree):
        if isinstance(node, ast.Import):
            names |= {alias.asname or alias.name.split(".")[0]: alias.name.split(".")[0] for alias in node.names}
        elif isinstance(node, ast.ImportFrom) and node.module:
            names |= {alias.asname or alias.name: node.module.split(".")[0] for alias in node.names}
    return names
