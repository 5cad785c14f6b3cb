"""Names, people's data and results are refused; the words of the trade and the operator's places are not."""

from __future__ import annotations

import pytest

from briefkit.session.privacy import PersonalData, refuse_personal, what_is_personal

REFUSED = [
    "Berg 70",
    "Berg: 70 kt",
    "Berg",
    "Anna Berg: 20 deg",
    "we go with Berg",
    "ask Berg about the bank",
    "J. Smith 70",
    "Capt Berg says 70",
    "capt berg 65",
    "Berg said seventy",
    "berg@example.org",
    "ring 0607 123 4567",
    "ATPL(H) 1234567",
    "student: Berg",
    "satisfactory",
    "further training needed",
    "passed the check",
    "7 out of 10",
]
WRITTEN = [
    "70 kt",
    "none",
    "None",
    "VNE less 10",
    "at most 20 deg, and 10 kt slower first",
    "Slow to VNE less 10 kt before the turn, no more than 20 degrees of bank.",
    "Go round by Harl Quay. Then turn.",
    "Restore the rpm; until then level",
    "refused: outside the chart",
    "if the governor fails, land",
    "over the pass at Vellmark",
    "QNH 995 hPa, Hp 7,700 ft",
    "",
]


@pytest.mark.parametrize("text", REFUSED)
def test_what_looks_personal_is_refused(deck, text):
    with pytest.raises(PersonalData, match="no names and no results"):
        refuse_personal("decision", text, deck.words | {"Harl", "Quay"})


@pytest.mark.parametrize("text", WRITTEN)
def test_what_a_group_says_is_written(deck, text):
    assert what_is_personal(text, deck.words) == ""


def test_places_are_known_only_from_the_operator_s_own_files():
    assert "name" in what_is_personal("round by Harl Quay")
    assert what_is_personal("round by Harl Quay", {"Harl", "Quay"}) == ""
