"""The changes that a remedy can be made of: each a function from a draft to a changed draft.

A change says what to do and what it breaks, and returns None where it does not apply or would
change nothing. Whether it helps is not decided here.
"""

from collections.abc import Callable, Mapping
from dataclasses import dataclass, replace
from types import MappingProxyType
from typing import Any

from auditor.declaration import EVERYBODY, Declaration, Party, Provenance
from auditor.encoding import shorten
from auditor.intake.standard_groups import StandardGroup, standard_groups
from auditor.routes.standard_tables import modulus_strength

PEERS = "All parties must change over at the same time; those that do not cannot connect."
KEYS = "Public values and keys made under the old parameters are void."
REDRAWN = "Keys that are kept have to be drawn again; peers notice nothing else."
OLD_VALUES = "Public values of the old exponents, and certificates for them, have to be withdrawn."
STORED = "What is stored encrypted has to be encrypted again before the old keys are discarded."

REPEATED = ("reused", "static")

TLS_WIDTHS: Mapping[str, int] = MappingProxyType(
    {"ffdhe2048": 225, "ffdhe3072": 275, "ffdhe4096": 325, "ffdhe6144": 375, "ffdhe8192": 400}
)
"""Widths that RFC 7919, 5.2 and Appendix A advise for exponents."""

WITH_MODP = ("ssh", "ikev1", "ikev2")
"""Protocols that negotiate the groups of RFC 3526 by name; TLS has those of RFC 7919. SP 800-56A
Rev. 3, Appendix D approves both for everything else."""

LEAST_LENGTH = 2048
"""SP 800-56A Rev. 3, Appendix D lists no shorter modulus, and RFC 9142, 3.2.1 refuses them."""


@dataclass(frozen=True, slots=True)
class Draft:
    """A declaration in the making, with what is known of the group that it now speaks of.

    ``order`` is ord(g) where it is a known prime, ``length`` the bit length of ord(g) where that is
    known; ``replacement`` is a prime order and an element that has it. ``group`` is the standard
    group moved to; ``moved`` says that the generator is another one. ``texts`` and ``breaks`` are
    what the changes so far say.
    """

    declaration: Declaration
    order: int | None = None
    length: int | None = None
    replacement: tuple[int, int] | None = None
    group: StandardGroup | None = None
    moved: bool = False
    texts: tuple[str, ...] = ()
    breaks: tuple[str, ...] = ()

    def changed(self, text: str, *breaks: str, **values: Any) -> "Draft":
        """The draft with other values, another sentence, and what else that breaks."""
        return replace(
            self,
            **values,
            texts=(*self.texts, text),
            breaks=tuple(dict.fromkeys((*self.breaks, *breaks))),
        )

    @property
    def parties(self) -> tuple[Party, ...]:
        """The parties, of which there is at least one."""
        return self.declaration.parties or (Party(EVERYBODY),)


Change = Callable[[Draft], Draft | None]


def true_order(draft: Draft) -> Draft | None:
    """Declare the order that the generator has."""
    order = draft.order
    if order is None or order == draft.declaration.subgroup_order:
        return None
    text = f"Declare subgroup_order {shorten(order)}: the generator has this prime order."
    declared = _order_declared(draft.declaration, order)
    return draft.changed(text, declaration=replace(draft.declaration, **declared))


def reduced_generator(draft: Draft) -> Draft | None:
    """Declare the residue that the generator stands for."""
    n, g = draft.declaration.modulus, draft.declaration.generator
    if n < 2 or g < n or g % n == 0:
        return None
    text = f"Write the generator as {shorten(g % n)}, its residue; no key and no value changes."
    declaration = replace(draft.declaration, generator=g % n)
    return draft.changed(text, declaration=declaration)


def _order_declared(declaration: Declaration, order: int) -> dict[str, Any]:
    """The keys that declare this order; a declared cofactor belongs to the order it came with."""
    kept = declaration.cofactor if order == declaration.subgroup_order else None
    return {"subgroup_order": order, "cofactor": kept}


def prime_order_generator(draft: Draft) -> Draft | None:
    """Move to a generator of a subgroup of prime order, modulus kept."""
    group = _published(draft.declaration)
    if group is not None:
        q, g = group.subgroup_order, group.generator
        text = f"Use the published generator of {group.name}, {shorten(g)}"
    elif draft.replacement is not None:
        q, g = draft.replacement
        text = f"Keep the modulus and use the generator {shorten(g)}"
    else:
        return None
    text += f"; declare subgroup_order {shorten(q)}, its prime order."
    changed = replace(
        draft.declaration,
        generator=g,
        subgroup_order=q,
        cofactor=None,
        public_values=(),
        provenance=_without_index(draft.declaration.provenance),
    )
    breaks = PEERS, KEYS, *_stored(draft.declaration)
    known = {"order": q, "length": q.bit_length(), "moved": True}
    return draft.changed(text, *breaks, declaration=changed, **known)


def _without_index(provenance: Provenance | None) -> Provenance | None:
    """The origin of modulus and order alone: the index is that of the old generator."""
    if provenance is None:
        return None
    kept = tuple((key, value) for key, value in provenance.values if key != "generator_index")
    return replace(provenance, values=kept)


def _published(declaration: Declaration) -> StandardGroup | None:
    """The standard group with this modulus and another generator."""
    modulus, g = declaration.modulus, declaration.generator
    found = (group for group in standard_groups() if group.modulus == modulus)
    return next((group for group in found if g % modulus != group.generator), None)


def move_to(group: StandardGroup) -> Change:
    """Move to a standard group."""

    def change(draft: Draft) -> Draft | None:
        declaration = draft.declaration
        if declaration.modulus == group.modulus or declaration.purpose == "signature":
            return None
        q = group.subgroup_order
        reached = modulus_strength(group.modulus.bit_length())
        text = (
            f"Move to {_name(group, declaration.protocol)} ({group.source}) with its generator "
            f"{group.generator}; by the published tables it reaches {reached} bits."
        )
        changed = replace(
            declaration,
            modulus=group.modulus,
            generator=group.generator,
            subgroup_order=q,
            cofactor=None,
            known_factors=(),
            public_values=(),
            provenance=None,
        )
        breaks = PEERS, KEYS, *_stored(declaration)
        known = {"order": q, "length": q.bit_length(), "group": group}
        return draft.changed(text, *breaks, declaration=changed, **known)

    return change


def _name(group: StandardGroup, protocol: str | None) -> str:
    """The registry's name, and the one that SSH negotiates."""
    if protocol != "ssh":
        return group.name
    negotiated = (name for name in group.aliases if name.startswith("diffie-hellman-"))
    return f"{group.name}, {' or '.join(list(negotiated)[1:])}"


def _stored(declaration: Declaration) -> tuple[str, ...]:
    return (STORED,) if declaration.purpose == "encryption" else ()


def groups_for(declaration: Declaration) -> tuple[StandardGroup, ...]:
    """The standard safe-prime groups that the protocol knows and that reach the required strength
    by the tables, smallest first; none for signatures, whose keys do not negotiate a group."""
    if declaration.purpose == "signature":
        return ()
    family = "modp" if declaration.protocol in WITH_MODP else "ffdhe"
    fit = (
        group
        for group in standard_groups()
        if group.name.startswith(family)
        and group.modulus.bit_length() >= LEAST_LENGTH
        and modulus_strength(group.modulus.bit_length()) >= declaration.required_bits
    )
    return tuple(sorted(fit, key=lambda group: group.modulus.bit_length()))


def hashed_message(draft: Draft) -> Draft | None:
    """Hash the shared value to a key instead of multiplying the message in as it is."""
    declaration = draft.declaration
    if declaration.purpose != "encryption" or declaration.scheme != "elgamal-raw":
        return None
    text = (
        "Do not multiply the message in as it is: derive a key from the shared value with a hash "
        "and encrypt the message under it with an authenticated cipher (scheme elgamal-hashed)."
    )
    changed = replace(declaration, scheme="elgamal-hashed", message_bits=None)
    return draft.changed(text, PEERS, STORED, declaration=changed)


def fresh_exponents(draft: Draft) -> Draft | None:
    """Draw an exponent for each exchange."""
    if draft.declaration.purpose not in (None, "key-agreement"):
        return None
    parties = tuple(replace(party, exponent_use="single") for party in draft.parties)
    text = "Draw a fresh exponent for each exchange and erase it afterwards."
    breaks = "Peers that know a static public value, or a certificate for it, have to do without."
    return _with_parties(draft, parties, text, breaks)


def range_check(draft: Draft) -> Draft | None:
    """Refuse received values outside of [2, n-2]."""
    sufficient = {"range", "membership", "cofactor"}
    parties = tuple(
        party if sufficient & set(party.peer_check or ()) else _checking(party)
        for party in draft.parties
    )
    text = f"Refuse received values outside of 2 to n-2{_who(draft, parties)}."
    return _unless_signing(draft, parties, text)


def _checking(party: Party, *more: str) -> Party:
    kept = party.peer_check or ()
    wanted = dict.fromkeys(("range", *more, *kept))
    return replace(party, peer_check=tuple(wanted))


def membership_where_reused(draft: Draft) -> Draft | None:
    """Check membership where an exponent is used again and nothing keeps received values in."""
    return _membership(draft, lambda party: party.exponent_use != "single")


def membership_everywhere(draft: Draft) -> Draft | None:
    """Check membership in every party."""
    return _membership(draft, lambda party: True)


def _membership(draft: Draft, wanted: Callable[[Party], bool]) -> Draft | None:
    order = draft.order
    if order is None:
        return None
    parties = tuple(
        _checking(party, "membership")
        if wanted(party) and not {"membership", "cofactor"} & set(party.peer_check or ())
        else party
        for party in draft.parties
    )
    text = (
        f"Refuse a received y unless 2 <= y <= n-2 and y^q = 1 modulo n{_who(draft, parties)}, "
        f"where q is the prime order of the generator, of {order.bit_length()} bits. That costs "
        "one more exponentiation for each received value and refuses no correct peer."
    )
    if not any(_met_anything(party) for party in draft.parties):
        return _unless_signing(draft, parties, text, subgroup_order=order)
    text += " Once the check is in, draw new exponents in place of those that were used without it."
    return _unless_signing(draft, parties, text, OLD_VALUES, subgroup_order=order)


def _met_anything(party: Party) -> bool:
    """Whether an exponent was used again on values that nothing kept inside the group."""
    closed = {"membership", "cofactor"} & set(party.peer_check or ())
    return party.exponent_use in REPEATED and not closed


def _who(draft: Draft, parties: tuple[Party, ...]) -> str:
    """The parties that change, where they have names."""
    changed = [new.role for old, new in zip(draft.parties, parties, strict=True) if old != new]
    return "" if changed == [EVERYBODY] else f" ({', '.join(changed)})"


def _unless_signing(
    draft: Draft,
    parties: tuple[Party, ...],
    text: str,
    *breaks: str,
    subgroup_order: int | None = None,
) -> Draft | None:
    if draft.declaration.purpose == "signature":
        return None
    order = subgroup_order
    declared = {} if order is None else _order_declared(draft.declaration, order)
    return _with_parties(draft, parties, text, *breaks, **declared)


def fit_widths(draft: Draft) -> Draft | None:
    """Draw exponents as wide as the requirement and the group ask for, and no wider than ord(g)."""
    least, most = _widths(draft)
    parties = tuple(
        replace(party, exponent_bits=min(max(party.exponent_bits or 0, least), most))
        for party in draft.parties
    )
    widths = " and ".join(str(bits) for bits in sorted({p.exponent_bits or 0 for p in parties}))
    text = f"Draw exponents of {widths} bits{_who(draft, parties)}."
    repeated = any(party.exponent_use in REPEATED for party in draft.parties)
    breaks = () if draft.group or not repeated else (REDRAWN,)
    return _with_parties(draft, parties, text, *breaks)


def _widths(draft: Draft) -> tuple[int, int]:
    """The least and the greatest width that fit.

    Twice the required strength (SP 800-56A Rev. 3, 5.6.1.1.1), and what RFC 7919 advises for its
    groups; the whole range below a prime order that is not half of n - 1 (5.6.1.1.2 there), and
    for signatures below any.
    """
    declaration, order = draft.declaration, draft.order
    least = 2 * declaration.required_bits
    published = next((g for g in standard_groups() if g.modulus == declaration.modulus), None)
    if published is not None:
        least = max(least, TLS_WIDTHS.get(published.name, 0))
    if draft.length is None:
        return least, max(least, declaration.modulus.bit_length())
    signing = declaration.purpose == "signature"
    if order is not None and (signing or 2 * order + 1 != declaration.modulus):
        return draft.length, draft.length
    return min(least, draft.length), draft.length


def _with_parties(
    draft: Draft, parties: tuple[Party, ...], text: str, *breaks: str, **values: Any
) -> Draft | None:
    if parties == draft.parties:
        return None
    declaration = replace(draft.declaration, parties=parties, **values)
    return draft.changed(text, *breaks, declaration=declaration)
