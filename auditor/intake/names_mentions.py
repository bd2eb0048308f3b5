"""A group as a configuration names it, and the words of a list that are in use."""

import re
from collections.abc import Iterator
from dataclasses import dataclass

from auditor.intake.names_blocks import Scope
from auditor.intake.names_statements import Statement, Word
from auditor.intake.standard_groups import StandardGroup

_OPERATOR = re.compile(r"^[+\-!^?*]+")


@dataclass(frozen=True, slots=True)
class Mention:
    """A group as a text names it, or why a name stands for no group.

    ``scopes`` are the blocks that may say the version of the protocol where ``protocol`` is open.
    With ``unless_known`` the reason holds where no protocol is known in the end.
    """

    word: Word
    text: str
    group: StandardGroup | None = None
    protocol: str | None = None
    reason: str = ""
    scopes: tuple[Scope, ...] = ()
    unless_known: bool = False


def in_use(statement: Statement) -> Iterator[tuple[Word, str]]:
    """The words of a list that are not taken out of it, without their operators."""
    for word in statement.words:
        operator = _OPERATOR.match(word.text)
        if operator and operator[0][0] in "-!":
            continue
        yield word, word.text[operator.end() :] if operator else word.text
