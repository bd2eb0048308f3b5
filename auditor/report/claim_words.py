"""A claim of the record as a sentence: what is said, and what shows it.

A kind that is not known here is written out member by member, so that no claim disappears.
"""

from collections.abc import Callable, Mapping
from typing import Any

from auditor.report.words import listed, plain_value, plural, power

Record = Mapping[str, Any]


def sentence(claim: Record) -> str:
    """What the claim says and how it is shown, in one line with long integers shortened."""
    statement, certificate = claim["statement"], claim["certificate"]
    writer = _WRITERS.get(claim["kind"], _any_kind)
    try:
        return writer(statement, certificate)
    except (KeyError, TypeError, ValueError):
        return _any_kind(statement, certificate)


def is_small_prime(claim: Record) -> bool:
    """Whether the claim is that a number below 2^64 is prime, which needs no words of its own."""
    return bool(claim["kind"] == "prime" and claim["certificate"].get("method") == "below-2^64")


def _prime(statement: Record, certificate: Record) -> str:
    method = certificate["method"]
    if method == "baillie-psw":
        how = (
            f"probable, by the Baillie-PSW test and {certificate['rounds']} strong tests to "
            f"unpredictable bases; error at most 2^-{certificate['error_bits']}"
        )
    elif method == "n-1":
        how = "proved from prime factors of n - 1"
    elif method == "below-2^64":
        how = "decided, as all numbers below 2^64"
    else:
        return _any_kind(statement, certificate)
    return f"{plain_value(statement['n'])} is prime: {how}"


def _composite(statement: Record, certificate: Record) -> str:
    number = plain_value(statement["n"])
    if "factor" in certificate:
        return f"{number} is composite: {plain_value(certificate['factor'])} divides it"
    witness = plain_value(certificate["witness"])
    return f"{number} is composite: it fails the strong test to base {witness}"


def _perfect_power(statement: Record, certificate: Record) -> str:
    number, base = plain_value(statement["n"]), plain_value(statement["base"])
    return f"{number} = {base} to the power {statement['exponent']}"


def _factorization(statement: Record, certificate: Record) -> str:
    return f"{plain_value(statement['n'])} = {_product(statement['factors'], statement['rest'])}"


def _order(statement: Record, certificate: Record) -> str:
    element, modulus = plain_value(statement["element"]), plain_value(statement["modulus"])
    known, rest = statement["known"], statement["rest"]
    order = _product(known, 1)
    if rest != 1:
        order += f" times a divisor, above 1, of {plain_value(rest)}"
    return f"The order of {element} modulo {modulus} is {order}"


def _subgroup_generator(statement: Record, certificate: Record) -> str:
    element, modulus = plain_value(statement["g"]), plain_value(statement["n"])
    order, base = plain_value(statement["q"]), statement["base"]
    return (
        f"{element} has the prime order {order} modulo {modulus}: it is the power of {base} with "
        f"exponent (n - 1)/q"
    )


def _membership(statement: Record, certificate: Record) -> str:
    element, exponent = plain_value(statement["element"]), plain_value(statement["exponent"])
    sign = "=" if statement["member"] else "is not"
    return f"{element} to the power {exponent} {sign} 1 modulo {plain_value(statement['modulus'])}"


def _searched(statement: Record, certificate: Record) -> str:
    runs = "; ".join(_run(run) for run in statement["runs"])
    return (
        f"No factor of {plain_value(statement['n'])} was found by {runs}; "
        f"attested, engine {certificate['engine']}"
    )


def _special_form(statement: Record, certificate: Record) -> str:
    number, cofactor = plain_value(statement["n"]), plain_value(certificate["cofactor"])
    at = f"{plain_value(certificate['g0'])} and {plain_value(certificate['g1'])}"
    coefficients = certificate["coefficients"]
    return (
        f"{number} has a special form: times {cofactor} it is the value of a polynomial of degree "
        f"{len(coefficients) - 1}, made homogeneous, at {at}; coefficients, that of x^0 first: "
        f"{plain_value(coefficients)}"
    )


def _form_searched(statement: Record, certificate: Record) -> str:
    tiers = ", ".join(map(str, statement["tiers"]))
    return (
        f"No special form of {plain_value(statement['n'])} was found among those looked for, of "
        f"tiers {tiers}; attested"
    )


def _origin(statement: Record, certificate: Record) -> str:
    recipe = statement["recipe"]
    return (
        f"The origin declared for {plain_value(statement['n'])}, by {recipe['method']} with "
        f"{recipe['hash']}, was replayed: {statement['outcome']}"
    )


def _formula(statement: Record, certificate: Record) -> str:
    number, constant = plain_value(statement["n"]), statement["constant"]
    if statement["offset"] is None:
        return f"{number} is not the number of the formula for {constant} with any offset to 2^32"
    return f"{number} is the number of the formula for {constant} with offset {statement['offset']}"


def _least_offset(statement: Record, certificate: Record) -> str:
    number, constant = plain_value(statement["n"]), statement["constant"]
    about = f"In the formula for {constant} that gives {number} with offset {statement['offset']}"
    if statement["smaller"] is None:
        return f"{about}, no smaller offset gives a safe prime"
    return f"{about}, the smaller offset {statement['smaller']} gives a safe prime"


def _canonical_generator(statement: Record, certificate: Record) -> str:
    element, number = plain_value(statement["g"]), plain_value(statement["n"])
    verb = "is" if statement["canonical"] else "is not"
    return (
        f"{element} {verb} what FIPS 186-4, A.2.3 makes of the seed with index "
        f"{statement['index']} modulo {number}"
    )


def _shared_exponents(statement: Record, certificate: Record) -> str:
    groups = [f"{len(group)} values" for group in statement["groups"]]
    shared = f"these share an exponent: {listed(groups)}" if groups else "no two share an exponent"
    return f"Of {_values(statement)}, {shared}"


def _visible_exponents(statement: Record, certificate: Record) -> str:
    return (
        f"Of {_values(statement)}, {len(statement['visible'])} are plus or minus a power of "
        f"{plain_value(statement['g'])} with an exponent of at most {statement['limit']}"
    )


def _values(statement: Record) -> str:
    return (
        f"{plural(len(statement['values']), 'public value')} modulo {plain_value(statement['n'])}"
    )


def _forgery_relations(statement: Record, certificate: Record) -> str:
    found = plural(len(statement["relations"]), "relation")
    base, number = plain_value(statement["alpha"]), plain_value(statement["n"])
    return f"Among those looked for, {found} that could serve a forger: base {base} modulo {number}"


def _run(run: Record) -> str:
    numbers = ", ".join(f"{key} {value}" for key, value in run.items() if key != "method")
    return f"{run['method']} ({numbers})" if numbers else str(run["method"])


def _product(factors: list[list[Any]], rest: int | str) -> str:
    known = listed([power(prime, exponent) for prime, exponent in factors], " · ")
    if rest == 1:
        return known or "1"
    unknown = f"{plain_value(rest)}, which is composite and not factored"
    return f"{known} · {unknown}" if known else unknown


def _any_kind(statement: Record, certificate: Record) -> str:
    says = _members(statement)
    shown = _members(certificate)
    return f"{says}; shown by {shown}" if shown else says


def _members(record: Record) -> str:
    return "; ".join(
        f"{key.replace('_', ' ')}: {plain_value(item)}" for key, item in record.items()
    )


_WRITERS: Mapping[str, Callable[[Record, Record], str]] = {
    "prime": _prime,
    "composite": _composite,
    "perfect-power": _perfect_power,
    "factorization": _factorization,
    "order": _order,
    "membership": _membership,
    "subgroup-generator": _subgroup_generator,
    "searched": _searched,
    "special-form": _special_form,
    "form-searched": _form_searched,
    "origin": _origin,
    "formula": _formula,
    "least-offset": _least_offset,
    "canonical-generator": _canonical_generator,
    "shared-exponents": _shared_exponents,
    "visible-exponents": _visible_exponents,
    "forgery-relations": _forgery_relations,
}
