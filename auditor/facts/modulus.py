"""Facts about the modulus."""

from auditor.facts import parts
from auditor.facts.given import Given
from auditor.facts.registry import fact
from auditor.intake import standard_groups
from auditor.questions import Asks, Question
from auditor.search.special_form import LEAST_LENGTH

NATURES = ("prime", "prime power", "power of two", "composite")


@fact("modulus.length", "int", "bit length of n")
def length(given: Given) -> int:
    return given.declaration.modulus.bit_length()


@fact("modulus.nature", "text", "what kind of number n is", NATURES)
def nature(given: Given) -> str:
    kind = given.see(parts.nature)
    given.settle()
    return kind


@fact("modulus.safe_prime", "bool", "n and (n-1)/2 are prime")
def safe_prime(given: Given) -> bool:
    n = given.declaration.modulus
    if n < 2:
        given.undefined()
    return given.see(parts.nature) == "prime" and given.is_prime((n - 1) // 2)


def standard(given: Given) -> tuple[str, str]:
    """Name and extent of the match with the registry of standard groups."""
    return standard_groups.match(given.declaration.modulus, given.declaration.generator)


@fact("modulus.standard_group", "text", "registry name of the group with this modulus, or none")
def standard_group(given: Given) -> str:
    return given.see(standard)[0]


@fact(
    "modulus.standard_match",
    "text",
    "whether modulus and generator are those of a standard group",
    ("exact", "modulus only", "none"),
)
def standard_match(given: Given) -> str:
    return given.see(standard)[1]


@fact("modulus.occurrences", "int", "parameter sets in this run with the same modulus")
def occurrences(given: Given) -> int:
    return given.run.census.get(given.declaration.modulus, 1)


@fact(
    "modulus.smallest_factor_length_at_most",
    "int",
    "bit length of the smallest known prime factor of a composite modulus",
)
def smallest_factor_length(given: Given) -> int:
    if given.see(parts.nature) == "prime":
        given.undefined()
    factors, rest = given.see(parts.known_modulus_factors)
    lengths = [prime.bit_length() for prime, _ in factors]
    # A composite rest without known factors has one of at most half its length.
    return min([*lengths, (rest.bit_length() + 1) // 2] if rest > 1 else lengths)


@fact(
    "modulus.special_form_seen",
    "bool",
    "a form was found that the special number field sieve can use; false only says: none among "
    "those looked for",
)
def special_form_seen(given: Given) -> bool:
    n = given.declaration.modulus
    if given.see(parts.nature) != "prime" or n.bit_length() < LEAST_LENGTH:
        given.undefined()
    form = given.claims.special_form(n)
    if form is not None:
        given.cite(form)
        return True
    if given.see(from_digits):
        return False
    record = given.claims.form_searched(n)
    question = Question(Asks.SPECIAL_FORM, (n,))
    if record is None:
        given.unsettled(question)
    given.cite(record)
    given.loosen(question)
    return False


def from_digits(given: Given) -> bool:
    """Whether the modulus is one of the published primes made from the digits of pi or e: their
    maker was free in nothing but an offset, which leaves no room for a form."""
    group = standard_groups.find(given.see(standard)[0])
    return group is not None and group.formula is not None
