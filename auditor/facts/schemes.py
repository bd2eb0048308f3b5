"""Facts about the scheme in which the group is used.

Forgery without the private key and distinguishing are no attacks on a key: they enter no minimum
of work, and the report lists them apart, as :mod:`auditor.facts.properties` words them.
"""

from auditor.claims.forgery import ForgeryRelations
from auditor.facts import generator, parts, subgroup, usage
from auditor.facts.given import Given
from auditor.facts.registry import fact
from auditor.questions import Asks, Question
from auditor.routes.base import floor_bits
from auditor.routes.factors import Factors
from auditor.routes.searches import subgroup_bits
from auditor.routes.signature_forgery import Forgery, power_of_divisor, shared_factor

CHEAP_LOGARITHM_BITS = 40
DSA_SIZES = ("1024/160", "2048/224", "2048/256", "3072/256")


def scheme_for(given: Given, purpose: str) -> str:
    """The declared scheme; undefined for another purpose."""
    if given.see(usage.purpose) != purpose:
        given.undefined()
    return str(given.see(usage.scheme))


def odd_prime_modulus(given: Given) -> int:
    """The modulus, a prime above 3; undefined otherwise."""
    n = given.declaration.modulus
    if given.see(parts.nature) != "prime" or n < 5:
        given.undefined()
    return n


def signature_scheme(given: Given) -> str:
    """The declared signature scheme."""
    return scheme_for(given, "signature")


def encryption_scheme(given: Given) -> str:
    """The declared encryption scheme."""
    return scheme_for(given, "encryption")


# Classical ElGamal signatures


def signature_base(given: Given) -> tuple[int, int]:
    """Modulus and base of classical ElGamal signatures, the base neither 1 nor -1."""
    if given.see(signature_scheme) != "elgamal":
        given.undefined()
    n, alpha = given.see(odd_prime_modulus), given.see(parts.element)
    if alpha in (1, n - 1):
        given.undefined()
    return n, alpha


def cheapest_forgery(given: Given) -> Forgery:
    """The forgery with the least work through the relations that hold; loose while p - 1 is not
    completely factored."""
    n, alpha = given.see(signature_base)
    claim = given.claims.about(ForgeryRelations, n, alpha=alpha)
    if claim is None:
        given.unsettled(Question(Asks.FORGERY_RELATIONS, (n, alpha)))
    given.cite(claim)
    known = given.see(parts.order_factors)
    factors = Factors(known.factors, known.rest)
    routes = {"root": power_of_divisor, "power": shared_factor}
    found = [routes[relation.form](n, relation.r, factors) for relation in claim.relations]
    if not found:
        given.undefined()
    return min(found, key=lambda forgery: (forgery.bits, forgery.condition, forgery.r))


@fact(
    "scheme.forgery_bits_at_most",
    "real",
    "work, once for each public key, after which classical ElGamal signatures are forged without "
    "the private key",
)
def forgery_bits_at_most(given: Given) -> float:
    return floor_bits(given.see(cheapest_forgery).bits)


@fact(
    "scheme.forgery_seen",
    "bool",
    "classical ElGamal signatures are forged without the private key, by less work than the "
    "required strength; false only says: not through the relations looked for",
)
def forgery_seen(given: Given) -> bool:
    seen = given.see(cheapest_forgery).bits < given.declaration.required_bits
    if seen:
        given.settle()
    return seen


# Encryption and key agreement


@fact(
    "scheme.message_symbol_leaks",
    "bool",
    "a ciphertext shows the Legendre symbol of its message",
)
def message_symbol_leaks(given: Given) -> bool:
    """The symbol of the mask y^k is known from y and g^k. A message that is multiplied in as it is
    keeps its own; one that is encoded into <g> has one of its own only where ord(g) is even."""
    scheme = given.see(encryption_scheme)
    given.see(odd_prime_modulus)
    if scheme == "elgamal-encoded":
        return bool(given.see(generator.order_even))
    return scheme == "elgamal-raw"


@fact(
    "scheme.distinguisher_seen",
    "bool",
    "shared secrets, or encryptions of two chosen messages, are told apart without the private "
    "key; false only says: not through a small factor of ord(g) or a message outside of <g>",
)
def distinguisher_seen(given: Given) -> bool:
    """Characters of small order of <g> are known from public values: Boneh, ANTS 1998. What a hash
    makes of the secret is not looked at."""
    scheme = None
    if given.see(usage.purpose) != "key-agreement":
        scheme = given.see(encryption_scheme)
    if scheme == "elgamal-raw":
        given.see(odd_prime_modulus)
        return True
    if scheme == "elgamal-hashed":
        given.undefined()
    order = given.see(parts.generator_order)
    seen = any(subgroup_bits(prime) <= CHEAP_LOGARITHM_BITS for prime, _ in order.factors)
    if seen:
        given.settle()
    return seen


@fact(
    "scheme.dsa_sizes",
    "text",
    "the lengths of p and q in bits, where they are a pair of FIPS 186-4, 4.2",
    (*DSA_SIZES, "other"),
)
def dsa_sizes(given: Given) -> str:
    if given.see(signature_scheme) != "dsa":
        given.undefined()
    q = given.see(subgroup.declared_order)
    sizes = f"{given.declaration.modulus.bit_length()}/{q.bit_length()}"
    return sizes if sizes in DSA_SIZES else "other"
