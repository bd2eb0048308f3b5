"""What leaks of an exponent is the number modulo which it becomes known, not more than there is."""

from math import log2, prod

import pytest

from auditor.declaration import Party
from auditor.facts import vocabulary
from auditor.routes.base import floor_bits
from auditor.rulebooks.judging import judge
from auditor.rulebooks.loading import load_all
from tests.facts.knowledge import declare, known, settled

SMOOTH = prod((2, 3, 5, 7, 11, 13, 17, 19, 23, 29, 31, 37))
ODD_PART = 2**61 - 1
N = 2 * SMOOTH * ODD_PART + 1
"""A prime."""


@pytest.mark.parametrize("width", [8, 200])
def test_the_words_are_true_of_a_narrow_exponent_too(width: int) -> None:
    """The number is that of the group; an exponent of 8 bits is not said to lose more than 8."""
    declaration = declare(
        N,
        pow(3, ODD_PART, N),
        purpose="key-agreement",
        parties=(Party("everybody", width, "static", ()),),
    )
    found = known(declaration, settled(declaration))
    judged = judge(load_all(["strength"], vocabulary()), found.facts, found.absent, vocabulary())
    statements = {finding.rule: finding.statement for finding in judged.findings}
    bits = found.facts["exponent.confinement_leak_bits_at_least"].value

    assert bits == floor_bits(log2(N - 1) - log2(ODD_PART))
    words = f"modulo a number of {bits:.2f} bits or more, and all of it"
    assert words in statements["confinement-leak"]
    assert "all of one that has no more bits" in statements["public-leak"]
