"""Names of published finite-field groups in text configuration.

A name counts only where its context leaves no doubt: in the value of a key that can have no other
meaning. SSH key exchange methods (RFC 4253, 8.1; RFC 8268, 3; RFC 8732, 4) in lists of methods;
TLS group names (RFC 7919, A) in lists of groups or curves; groups of IKE by number and by the
description in the registry (Transform Type 4), in proposals and in keys that say Diffie-Hellman
group or perfect forward secrecy. Elliptic curves and other exchanges are not looked at.

A set found so is for key agreement; the protocol is declared where the context says it: SSH by its
methods, the version of IKE as :mod:`auditor.intake.names_ike` describes. A name of TLS says nothing
of the version.
"""

import re
from collections.abc import Callable, Container, Iterator, Mapping
from dataclasses import replace

from auditor.declaration import Declaration, Place
from auditor.intake.inputs import InputError
from auditor.intake.names_ike import OPEN, flows, ike_group, ike_proposal, version_said
from auditor.intake.names_mentions import Mention, in_use
from auditor.intake.names_statements import Statement, statements
from auditor.intake.reading import Passed, Reading
from auditor.intake.standard_groups import StandardGroup, find
from auditor.schema_check import quoted

_NAMES = ("diffie-hellman-g", "gss-g", "ffdhe", "modp", "crypto ikev", "crypto isakmp", "ikev2")
_GROUP_KEY = re.compile(r"(?:dh|pfs|hellman)[\w\-. ]{0,12}gr(?:ou)?p|\bdh[0-9]")
_METHOD = re.compile(r"[a-z0-9@.+/=_\-]*[\-0-9][a-z0-9@.+/=_\-]*|none|default", re.IGNORECASE)
_SSH = re.compile(r"(?:diffie-hellman|gss)-(?:group(?P<number>\d+)|(?:group-exchange|gex))-sha\S+")
_TLS = re.compile(r"(?:group-)?(?P<name>ffdhe[0-9]+)", re.IGNORECASE)
_TLS_WORD = re.compile(r"[A-Za-z_.@/]*[\-0-9][\w.@/\-]*|[%@]?[A-Z_]+|auto|none|default")
MAX_NAMES = 10_000


def read_names(text: str, path: str) -> Reading:
    """The published groups that the configuration ``text`` names for use.

    A set is named by the text that names it; a repetition by its line as well, and one on the same
    line by its column. Names of methods without a fixed group, and numbers of two meanings, are
    passed over with the reason.
    """
    if not _worth_a_look(text.lower()):
        return Reading()
    in_order = _mentions(text)
    declarations: dict[str, Declaration] = {}
    passed: list[Passed] = []
    errors = [_too_many(path, mention) for mention in in_order[MAX_NAMES : MAX_NAMES + 1]]
    for mention in in_order[:MAX_NAMES]:
        unknown = mention.protocol is None and mention.unless_known
        if mention.group is None or unknown:
            passed.append(Passed(path, mention.reason, mention.word.line))
            continue
        name = _name(mention, declarations)
        declarations[name] = _declaration(name, mention, mention.group, path)
    return Reading(tuple(declarations.values()), tuple(errors), passed=tuple(passed))


def _name(mention: Mention, taken: Container[str]) -> str:
    word, text = mention.word, mention.text
    names = (text, f"{text} (line {word.line})")
    free = (name for name in names if name not in taken)
    return next(free, f"{text} (line {word.line}, column {word.column})")


def _mentions(text: str) -> list[Mention]:
    """What ``text`` mentions, by place, as far as is read; with the protocol where it is certain.

    Where a place is read in several ways, the reading in the innermost block counts. The version of
    IKE may stand behind what it is about, but in the same block.
    """
    found: dict[tuple[int, int], Mention] = {}
    versions: dict[int, set[str]] = {}

    def keep(mention: Mention) -> None:
        before = found.setdefault((mention.word.line, mention.word.column), mention)
        if before.protocol is None and len(mention.scopes) > len(before.scopes):
            found[mention.word.line, mention.word.column] = mention

    for mention in flows(text):
        keep(mention)
    for statement in statements(text):
        if (version := version_said(statement)) is not None:
            versions.setdefault(version[0].number, set()).add(version[1])
        for reader in _READERS:
            for mention in reader(statement):
                keep(mention)
        if len(found) > MAX_NAMES:
            break
    in_order = sorted(found.items(), key=lambda item: item[0])
    return [_with_version(mention, versions) for _, mention in in_order]


def _with_version(mention: Mention, versions: Mapping[int, set[str]]) -> Mention:
    """``mention`` with the protocol that the innermost block says which says one."""
    if mention.protocol is not None:
        return mention
    said = next((versions[s.number] for s in mention.scopes[::-1] if s.number in versions), set())
    protocol = next(iter(said)) if len(said) == 1 else OPEN
    return mention if protocol == OPEN else replace(mention, protocol=protocol)


def _too_many(path: str, mention: Mention) -> InputError:
    message = f"more than {MAX_NAMES} names of groups; those from here on are not read"
    return InputError(path, mention.word.line, mention.word.column, message)


def _worth_a_look(text: str) -> bool:
    """A quick look that spares most files the reading of their statements."""
    return any(name in text for name in _NAMES) or (
        any(word in text for word in ("dh", "pfs", "hellman"))
        and _GROUP_KEY.search(text) is not None
    )


def _declaration(name: str, mention: Mention, group: StandardGroup, path: str) -> Declaration:
    return Declaration(
        name=name,
        place=Place(path, mention.word.line, mention.word.column),
        modulus=group.modulus,
        generator=group.generator,
        subgroup_order=group.subgroup_order,
        purpose="key-agreement",
        protocol=mention.protocol,
    )


def _ssh(statement: Statement) -> Iterator[Mention]:
    """Key exchange methods; a list that begins with a minus sign is one of removals."""
    parts = statement.parts
    is_list = any("kex" in part or "keyexchange" in part for part in parts)
    if not (is_list or {"key", "exchange"} <= parts) or statement.value.lstrip("\"'")[:1] == "-":
        return
    words = list(in_use(statement))
    if not all(_METHOD.fullmatch(text) for _, text in words):
        return
    for word, text in words:
        if not text.startswith(("diffie-hellman-", "gss-g")):
            continue
        method = _SSH.fullmatch(text)
        if method is None:
            reason = f"{quoted(text)}: not a key exchange method of the registry"
            yield Mention(word, text, reason=reason)
        elif method["number"] is None:
            reason = f"{quoted(text)}: the groups are those of the server's moduli file"
            yield Mention(word, text, reason=reason)
        else:
            group = find(f"diffie-hellman-group{method['number']}")
            reason = f"{quoted(text)}: no group of that number is published for SSH"
            yield Mention(word, text, group, "ssh", reason)


def _tls(statement: Statement) -> Iterator[Mention]:
    """Names of RFC 7919, which no other registry uses; whether for TLS 1.2 or 1.3 is open."""
    parts = statement.parts
    named = any(part.endswith(("group", "groups", "curve", "curves", "priority")) for part in parts)
    if not named and not parts & {"priorities", "dhe", "ffdhe"}:
        return
    words = list(in_use(statement))
    if not all(_TLS_WORD.fullmatch(text) for _, text in words):
        return
    for word, text in words:
        if found := _TLS.fullmatch(text):
            reason = f"{quoted(text)}: not a group of RFC 7919"
            yield Mention(word, text, find(found["name"]), None, reason)


_READERS: tuple[Callable[[Statement], Iterator[Mention]], ...] = (
    _ssh,
    _tls,
    ike_proposal,
    ike_group,
)
