"""One look for every figure: colours with roles, sizes in pixels, and the style sheet that goes with them.

Black is the manual's, one deep blue is what was computed, grey is context; nothing is red, yellow or green (14 CFR
27.1545 gives those a meaning), and nothing rests on hue alone: dashes and weights differ too. A colour of this list
carries a class into the SVG, so that a dark page or a printer can restate it; a colour outside the list stays as it is.
"""

from __future__ import annotations

from typing import Final

INK: Final = "#16181d"
GREY: Final = "#565c66"
RULE: Final = "#c9cdd3"
BAND: Final = "#e4e6ea"
COMPUTED: Final = "#0b3f8c"
PAPER: Final = "#ffffff"

# Over a map the paper is the map, light or dark page alike, so these two never change.
MAP_INK: Final = "#0d1b2e"
MAP_PAPER: Final = "#fdfdfe"

# role -> (on white, on a dark page). Text roles keep at least 4.5 : 1 against their paper (WCAG 2.2, 1.4.3), and 7 : 1
# by the red part of their light alone: under a red lamp that is all there is.
_ROLES: Final[dict[str, tuple[str, str]]] = {
    "ink": (INK, "#eceef1"),
    "grey": (GREY, "#a6adb7"),
    "rule": (RULE, "#454b54"),
    "band": (BAND, "#2b3037"),
    "computed": (COMPUTED, "#a6c8ff"),
    "paper": (PAPER, "#14161a"),
}
_ROLE_OF: Final = {light: role for role, (light, _) in _ROLES.items()}

# Pale (slow, low) to deep (fast, high): one hue, even steps of lightness, so the order survives a grey printer.
_MAP_ENDS: Final = ((236, 243, 251), (8, 48, 107))
_MAP_MIDDLE: Final = (107, 160, 212)

# One sans family with tabular numerals, of the usual narrow proportions, whatever the machine has.
FONTS: Final = '"Helvetica Neue",Arial,"Liberation Sans",sans-serif'

WIDTH: Final = 440
SMALL: Final = 13.0
HEAVY: Final = 2.4
LINE: Final = 1.8
THIN: Final = 1.0
DASHES: Final = ("solid", "dashed", "dash_dotted", "dotted")


def role_of(colour: str) -> str | None:
    """The role a colour plays, or None for a colour outside the list (it then looks the same on every paper)."""
    return _ROLE_OF.get(colour.lower())


def map_steps(count: int) -> tuple[tuple[int, int, int], ...]:
    """`count` colours (8-bit red, green, blue) of one hue from pale to deep. `count` 1 to 24, else ValueError."""
    if not 1 <= count <= 24:
        raise ValueError(f"a stepped map has 1 to 24 steps, not {count}")
    steps = []
    for index in range(count):
        place = 0.0 if count == 1 else index / (count - 1)
        low, high = (_MAP_ENDS[0], _MAP_MIDDLE) if place < 0.5 else (_MAP_MIDDLE, _MAP_ENDS[1])
        share = 2.0 * place if place < 0.5 else 2.0 * place - 1.0
        red, green, blue = (round(a + (b - a) * share) for a, b in zip(low, high, strict=True))
        steps.append((red, green, blue))
    return tuple(steps)


def stylesheet() -> str:
    """CSS for the figures of a page: colours by role, restated for a dark page, plain again on paper.

    A page puts this in its one style element. Without it the figures show their own colours (presentation attributes).
    """
    light = "".join(f"--{role}:{colours[0]};" for role, colours in _ROLES.items())
    dark = "".join(f"--{role}:{colours[1]};" for role, colours in _ROLES.items())
    rules = "".join(f".stroke-{role}{{stroke:var(--{role})}}.fill-{role}{{fill:var(--{role})}}" for role in _ROLES)
    return (
        f":root{{{light}}}"
        f"@media screen and (prefers-color-scheme:dark){{:root{{{dark}}}}}"
        f"{rules}"
        ".exhibit svg{display:block;width:100%;height:auto;max-width:34rem;margin:0 auto;"
        "font-family:inherit;font-variant-numeric:tabular-nums}"
    )
