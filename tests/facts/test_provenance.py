"""Facts about the origin of the numbers, after a review: what verifies, what does not, and why."""

from dataclasses import replace

import gmpy2
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from auditor.claims.collection import Claims
from auditor.claims.origin_formula import formula, formula_of
from auditor.claims.origin_recipe import FIPS186_2, METHODS, PROBABLE, PROVABLE
from auditor.claims.origin_replay import Outcome
from auditor.claims.standing import Standing
from auditor.declaration import Declaration, Provenance
from auditor.facts import Established
from auditor.facts.provenance import COUNTERS, OTHER_DIGITS, SEEDS
from auditor.intake.standard_groups import find
from auditor.questions import Asks
from auditor.run_values import RunValues
from tests.facts.knowledge import declare, known, reviewed
from tests.standards.vectors import Block, OriginCase, blocks, origin_cases

QUICK = RunValues("2026-12-01", "quick")
THOROUGH = RunValues("2026-12-01", "thorough")
CASES = origin_cases()
ENDS = [
    (method, end)
    for method in METHODS
    for end in Outcome
    if any((case.recipe.method, case.expected) == (method, end) for case in CASES)
]


def case_of(method: str, end: Outcome) -> OriginCase:
    """The smallest case of the example files that ends so."""
    return min(
        (case for case in CASES if (case.recipe.method, case.expected) == (method, end)),
        key=lambda case: (case.lengths, case.recipe.counters),
    )


def provenance(case: OriginCase, **changes: int | str | None) -> Provenance:
    """The recipe in the keys of a declaration; None takes a key away."""
    recipe = case.recipe
    values: dict[str, int | str | None] = {
        **dict(zip(SEEDS[recipe.method], (seed.hex() for seed in recipe.seeds), strict=True)),
        **dict(zip(COUNTERS[recipe.method], recipe.counters, strict=True)),
    }
    values |= {"hash": recipe.hash} if recipe.method != FIPS186_2 else {}
    values |= changes
    return Provenance(recipe.method, tuple((k, v) for k, v in values.items() if v is not None))


def declared(case: OriginCase, **changes: int | str | None) -> Declaration:
    """The case as an owner declares it, with a generator of order q."""
    g = pow(2, (case.p - 1) // case.q, case.p)
    return declare(
        case.p, g, subgroup_order=case.q, purpose="signature", scheme="dsa",
        provenance=provenance(case, **changes),
    )  # fmt: skip


def standard(name: str, **values: object) -> Declaration:
    """A registered group."""
    group = find(name)
    assert group is not None
    return declare(group.modulus, group.generator, **values)


def value(facts: Established, name: str) -> object:
    """The value of a fact that must be there."""
    return facts.facts[name].value


@pytest.mark.parametrize(("method", "end"), ENDS)
def test_replays_become_facts(method: str, end: Outcome) -> None:
    """A set that regenerates is verified; any other is not, and the first step is named."""
    facts = reviewed(declared(case_of(method, end)), QUICK)
    good = end is Outcome.REGENERATED

    assert value(facts, "provenance.regenerated") is good
    assert value(facts, "provenance.verified") is good
    if good:
        assert facts.absent["provenance.disagreement"].reason == "undefined"
        assert facts.facts["provenance.verified"].standing is Standing.PROBABLE
    else:
        assert value(facts, "provenance.disagreement") == end.value


@pytest.mark.parametrize("method", METHODS)
def test_a_verified_origin_ends_the_hidden_form(method: str) -> None:
    """The designer's route is closed exactly where the numbers regenerate."""
    name = "strength.hidden_form_bits_at_most"
    good = reviewed(declared(case_of(method, Outcome.REGENERATED)), QUICK)
    bad = reviewed(declared(case_of(method, Outcome.OTHER_Q)), QUICK)

    assert good.absent[name].reason == "undefined"
    assert name in bad.facts


@pytest.mark.parametrize("key", ["hash", "seed", "counter"])
def test_what_is_not_declared_is_asked_for(key: str) -> None:
    """A missing key leaves the facts undeclared and names the key."""
    facts = reviewed(declared(case_of(PROBABLE, Outcome.REGENERATED), **{key: None}), QUICK)

    for name in ("provenance.verified", "provenance.regenerated"):
        assert facts.absent[name].reason == "undeclared"
        assert facts.absent[name].keys == (f"provenance.{key}",)


def test_the_order_is_asked_for() -> None:
    """Seeds and counter lead to p and q; without q there is nothing to compare."""
    declaration = replace(declared(case_of(PROBABLE, Outcome.REGENERATED)), subgroup_order=None)

    assert reviewed(declaration, QUICK).absent["provenance.verified"].keys == ("subgroup_order",)


@pytest.mark.parametrize(
    "changes",
    [
        {"hash": "md5"},
        {"seed": "not hexadecimal"},
        {"seed": "abc"},
        {"counter": -1},
        {"counter": "370"},
    ],
)
def test_values_that_cannot_be_read_count_as_undeclared(changes: dict[str, int | str]) -> None:
    """Unknown hash functions and seeds that are no bytes leave the origin open, with the key."""
    facts = reviewed(declared(case_of(PROBABLE, Outcome.REGENERATED), **changes), QUICK)

    assert facts.absent["provenance.verified"].reason == "undeclared"
    assert facts.absent["provenance.verified"].keys == (f"provenance.{next(iter(changes))}",)


@pytest.mark.parametrize(
    ("changes", "end"),
    [
        ({"counter": 2**32 - 1}, Outcome.COUNTER),
        ({"seed": "00"}, Outcome.SEED_LENGTH),
        ({"seed": ""}, Outcome.SEED_LENGTH),
        ({"seed": "ff" * 2**15}, Outcome.OTHER_Q),
        ({"counter": 0}, Outcome.OTHER_P),
    ],
)
def test_strange_values_are_false_with_a_reason(
    changes: dict[str, int | str], end: Outcome
) -> None:
    """Counters beyond every limit and seeds of any length end in bounded work."""
    facts = reviewed(declared(case_of(PROBABLE, Outcome.REGENERATED), **changes), QUICK)

    assert value(facts, "provenance.verified") is False
    assert value(facts, "provenance.disagreement") == end.value


def test_a_seed_that_the_standard_does_not_cover_decides_nothing() -> None:
    """Past its last value a seed counts on in no way that is written down: no verdict, a reason."""
    case = case_of(PROVABLE, Outcome.REGENERATED)
    full = "ff" * len(case.recipe.seeds[0])
    facts = reviewed(declared(case, first_seed=full), QUICK)

    assert facts.absent["provenance.verified"].reason == "undefined"
    assert value(facts, "provenance.disagreement") == Outcome.SEED_CARRY.value


texts = st.sampled_from(["", "00", "ff" * 20, "zz", "sha1", "sha256", "md5", "é", "a" * 41])
numbers = st.sampled_from([-1, 0, 1, 255, 256, 4095, 4096, 2**32, 2**70])
KEYS = (
    "hash", "seed", "counter", "first_seed", "p_seed", "q_seed", "p_counter", "q_counter",
    "generator_index", "text",
)  # fmt: skip


@settings(max_examples=150)
@given(
    st.sampled_from([*METHODS, "pi-formula", "e-formula", "other", "unheard-of"]),
    st.dictionaries(st.sampled_from(KEYS), texts | numbers),
    st.sampled_from([1, 2, 15, 23, 1000003, 2**127 - 1, 2**512 + 75]),
    st.none() | st.sampled_from([0, 1, 2, 11, 500001, 2**160 + 7]),
)
def test_any_account_of_origin_is_survived(
    method: str, values: dict[str, int | str], modulus: int, order: int | None
) -> None:
    """Whatever is declared, the facts are true, false or absent with a reason."""
    declaration = declare(
        modulus, 2, subgroup_order=order, provenance=Provenance(method, tuple(values.items()))
    )
    facts = reviewed(declaration, QUICK)

    for name in ("provenance.verified", "provenance.regenerated", "generator.canonical"):
        assert value(facts, name) is False if name in facts.facts else facts.absent[name].reason


# Digits of pi and e


@pytest.mark.parametrize("name", ["modp768", "modp2048", "ffdhe2048"])
def test_digits_verify_without_a_word(name: str) -> None:
    """A modulus made from pi or e needs no declaration; its offset is shown, and proven."""
    facts = reviewed(standard(name), QUICK)
    group = find(name)
    assert group is not None
    assert group.formula is not None

    assert value(facts, "provenance.verified") is True
    assert facts.facts["provenance.verified"].standing is Standing.PROVEN
    assert facts.facts["provenance.verified"].claims
    assert value(facts, "provenance.offset") == group.formula.offset
    assert facts.absent["provenance.regenerated"].reason == "undefined"
    assert facts.absent["strength.hidden_form_bits_at_most"].reason == "undefined"


@pytest.mark.parametrize("method", ["pi-formula", "e-formula"])
def test_declared_digits_are_compared(method: str) -> None:
    """Declared as made from the other constant, the modulus disagrees, though its origin is known;
    a modulus from no digits is not verified."""
    provenance = Provenance(method)
    modp = reviewed(standard("modp768", provenance=provenance), QUICK)
    other = reviewed(declare(1000003, 2, provenance=provenance), QUICK)

    assert value(modp, "provenance.regenerated") is (method == "pi-formula")
    assert value(modp, "provenance.verified") is True
    assert value(other, "provenance.verified") is False
    assert value(other, "provenance.disagreement") == OTHER_DIGITS
    if method == "e-formula":
        assert value(modp, "provenance.disagreement") == OTHER_DIGITS


def test_an_account_that_nobody_can_replay_verifies_nothing() -> None:
    """A text about the origin leaves it open and asks for a seed; no account asks for one."""
    told = reviewed(declare(1000003, 2, provenance=Provenance("other", (("text", "ours"),))), QUICK)
    silent = reviewed(declare(1000003, 2), QUICK)

    assert told.absent["provenance.verified"].keys == ("provenance.seed",)
    assert told.absent["provenance.regenerated"].reason == "undefined"
    assert silent.absent["provenance.verified"].keys == ("provenance",)


def test_the_least_offset_is_shown_at_thorough_effort() -> None:
    """It is asked for as a deep question, and answered only where minutes are allowed."""
    declaration = standard("modp768")
    quick = reviewed(declaration, replace(QUICK, effort="standard"))
    (question,) = quick.absent["provenance.offset_least"].questions

    assert question.asks is Asks.LEAST_OFFSET
    assert "149686" in question.about
    assert value(reviewed(declaration, THOROUGH), "provenance.offset_least") is True


def test_a_larger_offset_is_found_out() -> None:
    """The second offset that gives a safe prime of 256 bits: 5 below it stands the first."""
    first = formula_prime(0)
    second = formula_prime(first)
    facts = reviewed(declare(formula("pi", 256, second), 2), THOROUGH)

    assert value(facts, "provenance.offset_least") is False
    assert value(facts, "provenance.verified") is True


def formula_prime(after: int) -> int:
    """The next offset of pi that gives a safe prime of 256 bits."""
    offset = after + 1
    while not (
        gmpy2.is_prime(formula("pi", 256, offset) // 2)
        and gmpy2.is_prime(formula("pi", 256, offset))
    ):
        offset += 1
    return offset


def test_what_would_take_hours_is_not_asked() -> None:
    """The offsets of the largest groups stay open without a question."""
    declaration = standard("ffdhe8192")
    facts = known(declaration, Claims([formula_of(declaration.modulus, "e")]))

    assert facts.absent["provenance.offset_least"].reason == "unsettled"
    assert facts.absent["provenance.offset_least"].questions == ()


# Canonical generators


def generator_case(result: str) -> Block:
    """A case of A.2.4 with that result."""
    return next(
        block
        for block in blocks("DSA/FIPS_186-3/PQGVer.rsp")
        if block.section.startswith("A.2.4") and block.values["Result"].startswith(result)
    )


def with_generator(block: Block, method: str = PROBABLE, **changes: int | str) -> Declaration:
    """The case as an owner declares it."""
    values: dict[str, int | str] = {
        "hash": block.hash,
        "seed": block.values["domain_parameter_seed"],
        "generator_index": block.number("index"),
    }
    origin = Provenance(method, tuple((values | changes).items()))
    p, q, g = (block.number(key) for key in ("P", "Q", "G"))
    return declare(p, g, subgroup_order=q, provenance=origin)


@pytest.mark.parametrize(("result", "expected"), [("P", True), ("F", False)])
def test_canonical_generators(result: str, expected: bool) -> None:
    """Verdicts as in the file, without a counter for p, and False for another index."""
    block = generator_case(result)
    other = (block.number("index") + 1) % 256

    facts = reviewed(with_generator(block), QUICK)
    assert value(facts, "generator.canonical") is expected
    assert facts.absent["provenance.verified"].keys == ("provenance.counter",)
    moved = reviewed(with_generator(block, generator_index=other), QUICK)
    assert value(moved, "generator.canonical") is False


def test_three_seeds_make_one() -> None:
    """For provable primes the domain parameter seed is the three seeds in a row."""
    block = next(
        b
        for b in blocks("DSA/FIPS_186-3/PQGGen.rsp")
        if b.section.startswith("A.2.3") and "firstseed" in b.values
    )
    names = {"first_seed": "firstseed", "p_seed": "pseed", "q_seed": "qseed"}
    values = {key: block.values[name] for key, name in names.items()}
    values |= {"hash": block.hash}
    origin = Provenance(PROVABLE, (*values.items(), ("generator_index", block.number("index"))))
    p, q, g = (block.number(key) for key in ("P", "Q", "G"))

    facts = reviewed(declare(p, g, subgroup_order=q, provenance=origin), QUICK)
    assert value(facts, "generator.canonical") is True


@pytest.mark.parametrize("method", [FIPS186_2, "pi-formula", "e-formula", "other"])
def test_methods_without_an_index_ask_for_one(method: str) -> None:
    """A generator from an arbitrary h is not canonical, and a seed with an index is asked for."""
    facts = reviewed(declare(1000003, 2, provenance=Provenance(method)), QUICK)

    assert facts.absent["generator.canonical"].reason == "undeclared"
    assert facts.absent["generator.canonical"].keys == ("provenance.generator_index",)


@pytest.mark.parametrize("changes", [{"q": 4}, {"q": 1}, {"q": 7}, {"n": 1000001}])
def test_no_generator_is_canonical_in_no_group(changes: dict[str, int]) -> None:
    """A.2.4 presupposes primes p and q with q dividing p - 1."""
    origin = Provenance(PROBABLE, (("hash", "sha1"), ("seed", "ab"), ("generator_index", 1)))
    numbers = {"n": 1000003, "q": 166667} | changes
    facts = reviewed(
        declare(numbers["n"], 2, subgroup_order=numbers["q"], provenance=origin), QUICK
    )

    assert facts.absent["generator.canonical"].reason == "undefined"
