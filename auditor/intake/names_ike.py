"""Groups of IKE in configuration: proposals, keys that say Diffie-Hellman group, policies.

The version of IKE is known where the language itself has only one, or where the block says it:
policies of routers by their headings; ``keyexchange`` in the same section or block, or in one
around it; ``version`` of a connection; the two kinds of blocks of a daemon that speaks IKEv1 alone;
and flows that begin with the name of the daemon.
"""

import re
from collections.abc import Iterator

from auditor.intake.names_blocks import Scope
from auditor.intake.names_mentions import Mention, in_use
from auditor.intake.names_statements import Statement, Word, without_comment, words_in
from auditor.intake.standard_groups import StandardGroup, find, standard_groups
from auditor.schema_check import quoted

_KEYWORD = re.compile(r"(?:modp_?|dh_?|group_?|dhgroup_?)?[0-9]+(?:s[0-9]+)?", re.IGNORECASE)
_MODP = re.compile(r"modp_?(?P<bits>[0-9]+)(?:s(?P<order>[0-9]+))?", re.IGNORECASE)
_NUMBERED = re.compile(r"(?:dh|group|dh_?group)?_?(?P<number>[0-9]{1,5})", re.IGNORECASE)
_DESCRIPTION = re.compile(
    r"(?:alternate )?(?P<bits>[0-9]+)-bit modp(?: group)?"
    r"(?: with (?P<order>[0-9]+)-bit prime order subgroup)?",
    re.IGNORECASE,
)
_POLICIES = (
    (re.compile(r"crypto ikev2 (?:proposal|policy)\b"), "ikev2"),
    (re.compile(r"crypto (?:isakmp|ikev1) policy\b"), "ikev1"),
)
_PROPOSALS = frozenset({"ike", "esp", "ah", "proposal", "proposals"})
_BEGINS_A_PROPOSAL = re.compile(r"[0-9\-]|^default$")
_GROUP_WORDS = frozenset({"group", "groups", "grp", "grps"})
_IKE_WORDS = frozenset({"ike", "ipsec", "isakmp", "ikev1", "ikev2", "phase1", "phase2", "pfs"})

TWO_MEANINGS = 1
"""The number of the 768-bit group to IKE, and in the names of SSH of the 1024-bit one."""

OPEN = "open"
"""In the place of a protocol: the block speaks of the version, and leaves more than one."""

_KEY_EXCHANGE = {"ikev1": "ikev1", "ikev2": "ikev2"}
_ONE_VERSION = {"yes": "ikev2", "insist": "ikev2", "no": "ikev1", "never": "ikev1"}
_NUMBER_OF_VERSION = {"1": "ikev1", "2": "ikev2"}
_SHARED_SECTION = re.compile(r"conn\s+%default\b")
"""What others inherit, who may say another version."""

_FLOW = re.compile(r"[ \t]*(?P<daemon>ikev2|ike)[ \t]+(?=[^\s=:])")
_EXCHANGES = {
    "ikev2": ("ikev2", frozenset({"ikesa", "childsa"})),
    "ike": ("ikev1", frozenset({"main", "aggressive", "quick"})),
}
"""The first word of a flow: its version of IKE, and the words that begin the transforms."""

_TRANSFORMS = frozenset({"auth", "enc", "prf", "group", "lifetime"})
_OF_A_FLOW = re.compile(
    r"(?:grp(?P<number>[0-9]{1,2})|modp(?P<bits>[0-9]+)(?:-(?P<order>[0-9]+))?)"
)
_QUOTED = re.compile(r'"[^"]*"')


def version_said(statement: Statement) -> tuple[Scope, str] | None:
    """The block or section that ``statement`` gives a version of IKE, and the protocol."""
    if not statement.scopes:
        return None
    scope, value = statement.scopes[-1], statement.value.strip(" \t\r\"',;:=").lower()
    parts = statement.parts
    if parts in ({"keyexchange"}, {"key", "exchange"}):
        said = None if _SHARED_SECTION.match(scope.heading) else _KEY_EXCHANGE.get(value)
    elif statement.key == "ikev2" and scope.heading.startswith("conn "):
        said = None if _SHARED_SECTION.match(scope.heading) else _ONE_VERSION.get(value)
    elif statement.key == "version" and _is_connection(statement.scopes):
        said = _NUMBER_OF_VERSION.get(value)
    else:
        return None
    return scope, said or OPEN


def _is_connection(scopes: tuple[Scope, ...]) -> bool:
    return len(scopes) >= 2 and scopes[-2].heading == "connections"


def ike_proposal(statement: Statement) -> Iterator[Mention]:
    """Proposals that join algorithms with hyphens or semicolons: ``aes256-sha256-modp2048``.

    What begins like a sentence is none.
    """
    if not statement.parts & _PROPOSALS or not statement.words:
        return
    if not _BEGINS_A_PROPOSAL.search(statement.words[0].text):
        return
    for word, text in in_use(statement):
        column = word.column + len(word.text) - len(text)
        for piece in re.finditer(r"[^\-]+", text):
            name = piece[0].rstrip("!")
            group = _by_keyword(name) if re.match(r"modp|dh[0-9]", name, re.IGNORECASE) else None
            if group is not None:
                at = Word(name, word.line, column + piece.start())
                yield Mention(at, name, group, scopes=statement.scopes)


def ike_group(statement: Statement) -> Iterator[Mention]:
    """Group numbers and keywords in keys that say Diffie-Hellman group, or in IKE policies."""
    policy = _of_policy(statement)
    if policy is None and not _says_group(statement):
        return
    protocol = policy or _of_language(statement)
    described = _DESCRIPTION.fullmatch(statement.value.strip(" \t\r\"',;"))
    if described and statement.words:
        text = statement.value.strip(" \t\r\"',;")
        yield Mention(statement.words[0], text, _modp(described), protocol, scopes=statement.scopes)
        return
    if not all(_KEYWORD.fullmatch(word.text) for word in statement.words):
        return
    sure = bool(statement.parts & _IKE_WORDS)
    for word in statement.words:
        group = _by_keyword(word.text)
        if group is None:
            continue
        text = f"{statement.key} {word.text}" if word.text.isdigit() else word.text
        reason = ""
        if group.ike == TWO_MEANINGS and not sure and "modp" not in word.text.lower():
            reason = f"{quoted(text)}: modp768 to IKE, modp1024 to SSH; the context does not say"
        yield Mention(word, text, group, protocol, reason, statement.scopes, bool(reason))


def _of_policy(statement: Statement) -> str | None:
    """The version of IKE of a policy whose key ``group`` it is."""
    if statement.parts != {"group"} or not statement.scopes:
        return None
    heading = statement.scopes[0].heading
    return next((name for form, name in _POLICIES if form.match(heading)), None)


def _of_language(statement: Statement) -> str | None:
    """The version of IKE where block and key belong to a language that knows no other."""
    headings = [scope.heading.split()[:1] for scope in statement.scopes if scope.number > 0]
    if statement.key == "pfs_group" and headings[-1:] == [["sainfo"]]:
        return "ikev1"
    if statement.key == "dh_group" and headings[-2:] == [["remote"], ["proposal"]]:
        return "ikev1"
    return None


def _says_group(statement: Statement) -> bool:
    parts = statement.parts
    if parts & {"dhgroup", "dhgroups", "dhgrp", "pfsgroup", "pfsgrp"}:
        return True
    if parts == {"pfs"}:
        return not any(word.text.isdigit() for word in statement.words)
    return bool(parts & _GROUP_WORDS) and (
        bool(parts & {"dh", "pfs"}) or {"diffie", "hellman"} <= parts
    )


def flows(text: str) -> Iterator[Mention]:
    """The groups in flows of IKE daemons: ``ikev2 … ikesa … group modp2048 childsa …``.

    A flow is one line, or more with a backslash at their ends; ``group`` counts among the
    transforms alone.
    """
    daemon = expected = ""
    for number, raw in enumerate(text.split("\n"), 1):
        begin = None if daemon else _FLOW.match(raw)
        if begin is None and not daemon:
            continue
        line = without_comment(raw)
        if begin is not None:
            daemon, expected = begin["daemon"], ""
        protocol, exchanges = _EXCHANGES[daemon]
        plain = _QUOTED.sub(lambda name: " " * len(name[0]), line)
        for word in words_in(plain, number, 0):
            if word.text in exchanges:
                expected = "transform"
            elif expected == "transform":
                expected = word.text if word.text in _TRANSFORMS else ""
            elif expected:
                group = _of_flow(word.text) if expected == "group" else None
                if group is not None:
                    yield Mention(word, word.text, group, protocol)
                expected = "transform"
        if not line.endswith("\\"):
            daemon = ""


def _of_flow(text: str) -> StandardGroup | None:
    found = _OF_A_FLOW.fullmatch(text)
    if found is None:
        return None
    return _by_keyword(found["number"]) if found["number"] else _modp(found)


def _by_keyword(text: str) -> StandardGroup | None:
    """The group that ``modp2048``, ``modp2048s256``, ``group14``, ``dh14`` or ``14`` stands for."""
    if found := _MODP.fullmatch(text):
        return _modp(found)
    if found := _NUMBERED.fullmatch(text):
        number = int(found["number"])
        return next((group for group in standard_groups() if group.ike == number), None)
    return None


def _modp(found: re.Match[str]) -> StandardGroup | None:
    bits, order = found["bits"], found["order"]
    return find(f"rfc5114-{bits}-{order}" if order else f"modp{bits}")
