"""Names of published finite-field groups in text configuration.

A name counts only where its context leaves no doubt: in the value of a key that can have no other
meaning. SSH key exchange methods (RFC 4253, 8.1; RFC 8268, 3; RFC 8732, 4) in lists of methods;
TLS group names (RFC 7919, A) in lists of groups or curves; groups of IKE by number and by the
description in the registry (Transform Type 4), in proposals and in keys that say Diffie-Hellman
group or perfect forward secrecy. Elliptic curves and other exchanges are not looked at.

A set found so is for key agreement; the protocol is declared where the context says it.
"""

import re
from collections.abc import Callable, Iterator
from dataclasses import dataclass

from auditor.declaration import Declaration, Place
from auditor.intake.inputs import InputError
from auditor.intake.names_statements import Statement, Word, statements
from auditor.intake.reading import Passed, Reading
from auditor.intake.standard_groups import StandardGroup, find, standard_groups
from auditor.schema_check import quoted

_NAMES = ("diffie-hellman-g", "gss-g", "ffdhe", "modp", "crypto ikev", "crypto isakmp")
_GROUP_KEY = re.compile(r"(?:dh|pfs|hellman)[\w\-. ]{0,12}gr(?:ou)?p|\bdh[0-9]")
_OPERATOR = re.compile(r"^[+\-!^?*]+")
_METHOD = re.compile(r"[a-z0-9@.+/=_\-]*[\-0-9][a-z0-9@.+/=_\-]*|none|default", re.IGNORECASE)
_SSH = re.compile(r"(?:diffie-hellman|gss)-(?:group(?P<number>\d+)|(?:group-exchange|gex))-sha\S+")
_TLS = re.compile(r"(?:group-)?(?P<name>ffdhe[0-9]+)", re.IGNORECASE)
_TLS_WORD = re.compile(r"[A-Za-z_.@/]*[\-0-9][\w.@/\-]*|[%@]?[A-Z_]+|auto|none|default")
_KEYWORD = re.compile(r"(?:modp_?|dh_?|group_?|dhgroup_?)?[0-9]+(?:s[0-9]+)?", re.IGNORECASE)
_MODP = re.compile(r"modp_?(?P<bits>[0-9]+)(?:s(?P<order>[0-9]+))?", re.IGNORECASE)
_NUMBERED = re.compile(r"(?:dh|group|dh_?group)?_?(?P<number>[0-9]{1,5})", re.IGNORECASE)
_DESCRIPTION = re.compile(
    r"(?:alternate )?(?P<bits>[0-9]+)-bit modp(?: group)?"
    r"(?: with (?P<order>[0-9]+)-bit prime order subgroup)?",
    re.IGNORECASE,
)
_SECTIONS = (
    (re.compile(r"crypto ikev2 (?:proposal|policy)\b"), "ikev2"),
    (re.compile(r"crypto (?:isakmp|ikev1) policy\b"), "ikev1"),
)
_PROPOSALS = frozenset({"ike", "esp", "ah", "proposal", "proposals"})
_GROUP_WORDS = frozenset({"group", "groups", "grp", "grps"})
_IKE_WORDS = frozenset({"ike", "ipsec", "isakmp", "ikev1", "ikev2", "phase1", "phase2", "pfs"})

MAX_NAMES = 10_000

TWO_MEANINGS = 1
"""The number of the 768-bit group to IKE, and in the names of SSH of the 1024-bit one."""


@dataclass(frozen=True, slots=True)
class _Mention:
    """A group as a text names it, or why a name stands for no group."""

    word: Word
    text: str
    group: StandardGroup | None = None
    protocol: str | None = None
    reason: str = ""


def read_names(text: str, path: str) -> Reading:
    """The published groups that the configuration ``text`` names for use.

    A set is named by the text that names it; a repetition by its line as well. Names of methods
    without a fixed group, and numbers of two meanings, are passed over with the reason.
    """
    if not _worth_a_look(text.lower()):
        return Reading()
    mentions: dict[tuple[int, int], _Mention] = {}
    for statement in statements(text):
        for reader in _READERS:
            for mention in reader(statement):
                mentions.setdefault((mention.word.line, mention.word.column), mention)
        if len(mentions) > MAX_NAMES:
            break
    declarations: dict[str, Declaration] = {}
    passed: list[Passed] = []
    in_order = [mention for _, mention in sorted(mentions.items(), key=lambda item: item[0])]
    errors = [_too_many(path, mention) for mention in in_order[MAX_NAMES : MAX_NAMES + 1]]
    for mention in in_order[:MAX_NAMES]:
        if mention.group is None:
            passed.append(Passed(path, mention.reason, mention.word.line))
            continue
        name = mention.text
        if name in declarations:
            name = f"{name} (line {mention.word.line})"
        declarations.setdefault(name, _declaration(name, mention, mention.group, path))
    return Reading(tuple(declarations.values()), tuple(errors), passed=tuple(passed))


def _too_many(path: str, mention: _Mention) -> InputError:
    message = f"more than {MAX_NAMES} names of groups; those from here on are not read"
    return InputError(path, mention.word.line, mention.word.column, message)


def _worth_a_look(text: str) -> bool:
    """A quick look that spares most files the reading of their statements."""
    return any(name in text for name in _NAMES) or (
        any(word in text for word in ("dh", "pfs", "hellman"))
        and _GROUP_KEY.search(text) is not None
    )


def _declaration(name: str, mention: _Mention, group: StandardGroup, path: str) -> Declaration:
    return Declaration(
        name=name,
        place=Place(path, mention.word.line, mention.word.column),
        modulus=group.modulus,
        generator=group.generator,
        subgroup_order=group.subgroup_order,
        purpose="key-agreement",
        protocol=mention.protocol,
    )


def _in_use(statement: Statement) -> Iterator[tuple[Word, str]]:
    """The words of a list that are not taken out of it, without their operators."""
    for word in statement.words:
        operator = _OPERATOR.match(word.text)
        if operator and operator[0][0] in "-!":
            continue
        yield word, word.text[operator.end() :] if operator else word.text


def _ssh(statement: Statement) -> Iterator[_Mention]:
    """Key exchange methods; a list that begins with a minus sign is one of removals."""
    parts = statement.parts
    is_list = any("kex" in part or "keyexchange" in part for part in parts)
    if not (is_list or {"key", "exchange"} <= parts) or statement.value.lstrip("\"'")[:1] == "-":
        return
    words = list(_in_use(statement))
    if not all(_METHOD.fullmatch(text) for _, text in words):
        return
    for word, text in words:
        if not text.startswith(("diffie-hellman-", "gss-g")):
            continue
        method = _SSH.fullmatch(text)
        if method is None:
            reason = f"{quoted(text)}: not a key exchange method of the registry"
            yield _Mention(word, text, reason=reason)
        elif method["number"] is None:
            reason = f"{quoted(text)}: the groups are those of the server's moduli file"
            yield _Mention(word, text, reason=reason)
        else:
            group = find(f"diffie-hellman-group{method['number']}")
            reason = f"{quoted(text)}: no group of that number is published for SSH"
            yield _Mention(word, text, group, "ssh", reason)


def _tls(statement: Statement) -> Iterator[_Mention]:
    """Names of RFC 7919, which no other registry uses; whether for TLS 1.2 or 1.3 is open."""
    parts = statement.parts
    named = any(part.endswith(("group", "groups", "curve", "curves", "priority")) for part in parts)
    if not named and not parts & {"priorities", "dhe", "ffdhe"}:
        return
    words = list(_in_use(statement))
    if not all(_TLS_WORD.fullmatch(text) for _, text in words):
        return
    for word, text in words:
        if found := _TLS.fullmatch(text):
            reason = f"{quoted(text)}: not a group of RFC 7919"
            yield _Mention(word, text, find(found["name"]), None, reason)


def _ike_proposal(statement: Statement) -> Iterator[_Mention]:
    """Proposals that join algorithms with hyphens or semicolons: ``aes256-sha256-modp2048``."""
    if not statement.parts & _PROPOSALS:
        return
    for word, text in _in_use(statement):
        column = word.column + len(word.text) - len(text)
        for piece in re.finditer(r"[^\-]+", text):
            name = piece[0].rstrip("!")
            group = _by_keyword(name) if re.match(r"modp|dh[0-9]", name, re.IGNORECASE) else None
            if group is not None:
                yield _Mention(Word(name, word.line, column + piece.start()), name, group)


def _ike_group(statement: Statement) -> Iterator[_Mention]:
    """Group numbers and keywords in keys that say Diffie-Hellman group, or in IKE policies."""
    protocol = next((name for form, name in _SECTIONS if form.match(statement.section)), None)
    policy = protocol is not None and statement.parts == {"group"}
    if not policy and not _says_group(statement):
        return
    described = _DESCRIPTION.fullmatch(statement.value.strip(" \t\r\"',;"))
    if described and statement.words:
        text = statement.value.strip(" \t\r\"',;")
        yield _Mention(statement.words[0], text, _modp(described), protocol, "")
        return
    if not all(_KEYWORD.fullmatch(word.text) for word in statement.words):
        return
    sure = policy or bool(statement.parts & _IKE_WORDS)
    for word in statement.words:
        group = _by_keyword(word.text)
        if group is None:
            continue
        text = f"{statement.key} {word.text}" if word.text.isdigit() else word.text
        if group.ike == TWO_MEANINGS and not sure and "modp" not in word.text.lower():
            reason = f"{quoted(text)}: modp768 to IKE, modp1024 to SSH; the context does not say"
            yield _Mention(word, text, reason=reason)
        else:
            yield _Mention(word, text, group, protocol)


def _says_group(statement: Statement) -> bool:
    parts = statement.parts
    if parts & {"dhgroup", "dhgroups", "dhgrp", "pfsgroup", "pfsgrp"}:
        return True
    if parts == {"pfs"}:
        return not any(word.text.isdigit() for word in statement.words)
    return bool(parts & _GROUP_WORDS) and (
        bool(parts & {"dh", "pfs"}) or {"diffie", "hellman"} <= parts
    )


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


_READERS: tuple[Callable[[Statement], Iterator[_Mention]], ...] = (
    _ssh,
    _tls,
    _ike_proposal,
    _ike_group,
)
