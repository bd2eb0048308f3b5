"""Conditions: three-valued logic, reasons, bounds, and everything the language refuses."""

from itertools import pairwise

import cel
import pytest
from hypothesis import given
from hypothesis import strategies as st

from auditor.claims.standing import Standing
from auditor.facts.base import Absent, Fact, FactType
from auditor.questions import Asks, Question
from auditor.rulebooks.condition_syntax import DEEPEST, LONGEST, SyntaxProblem, parse, render
from auditor.rulebooks.conditions import Compiler, ConditionError, Decision, Verdict, View
from tests.vocabulary_of_the_contract import VOCABULARY

COMPILER = Compiler(VOCABULARY)
WORDS = {
    **{f"a.b{i}": FactType(f"a.b{i}", "bool", "") for i in range(3)},
    **{f"a.n{i}": FactType(f"a.n{i}", "int", "") for i in range(2)},
    "a.r_at_most": FactType("a.r_at_most", "real", ""),
    "a.s_at_least": FactType("a.s_at_least", "int", ""),
    "a.t_seen": FactType("a.t_seen", "bool", ""),
    "a.w": FactType("a.w", "text", "", ("x", "y")),
}
SMALL = Compiler(WORDS)
BOUNDS = ("a.r_at_most", "a.s_at_least", "a.t_seen")


def fact(value: object, tight: bool = True) -> Fact:
    return Fact(value, Standing.PROVEN, tight)


def decide(
    source: str, facts: dict[str, Fact], absent: dict[str, Absent] | None = None
) -> Decision:
    return COMPILER.compile(source).decide(View(facts, absent or {}, VOCABULARY))


# The laws


def comparisons() -> st.SearchStrategy[str]:
    numbers = st.sampled_from(("a.n0", "a.n1", "a.s_at_least", "2", "-1", "(a.n0 + 1)", "a.n1 * 2"))
    reals = st.sampled_from(("a.r_at_most", "1.5", "double(a.n0)", "(a.r_at_most + 0.5)"))
    signs = st.sampled_from(("<", "<=", ">", ">="))
    return st.one_of(
        st.sampled_from(("a.b0", "a.b1", "a.b2", "a.t_seen", "true", "a.w == 'x'", "a.w != 'y'")),
        st.sampled_from(("a.w in ['x']", "a.n0 == a.n1", "a.n0 in [0, 3]", "a.b0 == a.b1")),
        st.tuples(numbers, signs, st.one_of(numbers, reals)).map(" ".join),
        st.tuples(reals, signs, numbers).map(" ".join),
    )


def conditions() -> st.SearchStrategy[str]:
    return st.recursive(
        comparisons().map(lambda text: f"({text})"),
        lambda inner: st.one_of(
            inner.map(lambda text: f"!{text}"),
            st.tuples(inner, st.sampled_from(("&&", "||")), inner).map(
                lambda parts: f"({' '.join(parts)})"
            ),
            st.tuples(inner, inner, inner).map(lambda parts: f"({' || '.join(parts)})"),
        ),
        max_leaves=6,
    )


def values() -> st.SearchStrategy[dict[str, object]]:
    kinds = {
        "bool": st.booleans(),
        "int": st.integers(-1, 4),
        "real": st.sampled_from((0.0, 1.0, 1.5, 2.5)),
        "text": st.sampled_from(("x", "y")),
    }
    return st.fixed_dictionaries({name: kinds[word.kind] for name, word in WORDS.items()})


def kleene(node, known):
    """Strong three-valued logic written out, independent of the evaluator; None is unknown."""
    parts = [kleene(part, known) for part in node.parts]
    match node.op:
        case "literal":
            return node.value
        case "name":
            return known.get(node.value)
        case "&&":
            return False if False in parts else None if None in parts else True
        case "||":
            return True if True in parts else None if None in parts else False
    if None in parts:
        return None
    match node.op, *parts:
        case "list", *items:
            return items
        case "!", inner:
            return not inner
        case "negative", inner:
            return -inner
        case "double", inner:
            return float(inner)
    left, right = parts
    table = {
        "==": left == right if node.op == "==" else None,
        "!=": left != right if node.op == "!=" else None,
    }
    if node.op in table:
        return table[node.op]
    return {
        "in": lambda: left in right,
        "<": lambda: left < right,
        "<=": lambda: left <= right,
        ">": lambda: left > right,
        ">=": lambda: left >= right,
        "+": lambda: left + right,
        "-": lambda: left - right,
        "*": lambda: left * right,
    }[node.op]()


def accepted(source: str):
    """The condition, or None where a bound could turn it from false to true."""
    try:
        return SMALL.compile(source)
    except ConditionError as error:
        problems = error.problems
    assert all("may still" in problem for problem in problems)
    return None


def view_of(known: dict[str, object], loose: frozenset[str] = frozenset()) -> View:
    facts = {name: fact(value, name not in loose) for name, value in known.items()}
    return View(facts, {}, WORDS)


@given(conditions(), values(), st.sets(st.sampled_from(sorted(WORDS))))
def test_the_evaluator_agrees_with_kleene_logic(source, known, removed):
    """With any facts absent the verdict is that of strong three-valued logic."""
    condition = accepted(source)
    left = {name: value for name, value in known.items() if name not in removed}
    tree = parse(source)
    expected = kleene(tree, left)
    if condition is None:
        condition_text = render(tree, {})
        context = cel.Context({"a": {name[2:]: value for name, value in left.items()}})
        try:
            assert cel.compile(condition_text).execute(context) is expected
        except KeyError:
            assert expected is None
        return
    verdict = condition.decide(view_of(left)).verdict
    assert verdict == {True: Verdict.TRUE, False: Verdict.FALSE, None: Verdict.OPEN}[expected]


@given(conditions(), values(), st.sets(st.sampled_from(sorted(WORDS)), min_size=1))
def test_removing_facts_only_opens(source, known, removed):
    """Taking facts away never changes a verdict into its opposite, nor an open one into either."""
    condition = accepted(source)
    if condition is None:
        return
    before = condition.decide(view_of(known)).verdict
    left = {name: value for name, value in known.items() if name not in removed}
    after = condition.decide(view_of(left)).verdict
    assert after in (before, Verdict.OPEN)


@given(conditions(), values(), st.sets(st.sampled_from(sorted(WORDS))))
def test_what_is_missing_could_decide(source, known, removed):
    """An open condition names facts it lacks, all of them absent; with all of them it decides."""
    condition = accepted(source)
    if condition is None:
        return
    left = {name: value for name, value in known.items() if name not in removed}
    decision = condition.decide(view_of(left))
    assert set(decision.missing) <= removed & set(condition.names)
    if decision.verdict is Verdict.OPEN:
        assert decision.missing
        answered = left | {name: known[name] for name in decision.missing}
        again = condition.decide(view_of(answered))
        assert again.verdict is not Verdict.OPEN or set(again.missing) - set(decision.missing)


@given(conditions(), values())
def test_canonical_text_means_the_source(source, known):
    """The evaluator says the same of the source itself and of the text made from its tree."""
    context = cel.Context({"a": {name[2:]: value for name, value in known.items()}})
    rendered = render(parse(source), {})
    assert cel.compile(source).execute(context) is cel.compile(rendered).execute(context)
    assert render(parse(rendered), {}) == rendered


@given(
    conditions(),
    values(),
    st.lists(st.tuples(st.sampled_from((0, 0.5, 1)), st.integers(0, 2), st.booleans()), max_size=4),
)
def test_a_tightening_bound_never_takes_a_finding_back(source, known, steps):
    """Over any sequence of tightening bounds, an accepted condition does not go false to true."""
    condition = accepted(source)
    if condition is None:
        return
    history = [dict(known)]
    for down, up, seen in steps:
        last = dict(history[-1])
        last["a.r_at_most"] -= down
        last["a.s_at_least"] += up
        last["a.t_seen"] = last["a.t_seen"] or seen
        history.append(last)
    loose = frozenset(BOUNDS)
    verdicts = [condition.decide(view_of(facts, loose)).verdict for facts in history]
    for earlier, later in pairwise(verdicts):
        assert (earlier, later) != (Verdict.FALSE, Verdict.TRUE)
        assert (earlier, later) != (Verdict.FALSE, Verdict.OPEN)


def test_what_the_checker_refuses_does_take_findings_back():
    """The refusal of a falling bound is needed: with it the verdict would turn to true."""
    tree = parse("a.r_at_most <= 1.0")
    texts = [
        cel.compile(render(tree, {})).execute(cel.Context({"a": {"r_at_most": value}}))
        for value in (2.0, 1.0)
    ]

    assert texts == [False, True]
    with pytest.raises(ConditionError, match="may still fall"):
        SMALL.compile("a.r_at_most <= 1.0")


# Reasons and bounds


@pytest.mark.parametrize(
    ("source", "verdict"),
    [
        ("generator.unit || generator.trivial", Verdict.TRUE),
        ("generator.trivial || generator.unit", Verdict.TRUE),
        ("!generator.unit && generator.trivial", Verdict.FALSE),
        ("generator.trivial && !generator.unit", Verdict.FALSE),
        ("generator.trivial && generator.unit", Verdict.OPEN),
        ("generator.trivial", Verdict.OPEN),
    ],
)
def test_the_other_side_decides(source, verdict):
    """An absent fact does not matter where the other side of && or || already decides."""
    assert decide(source, {"generator.unit": fact(True)}).verdict is verdict


def test_reasons():
    """Only undefined facts missing: the condition makes no sense; anything else: it is open."""
    source = "usage.scheme == 'dsa' && usage.protocol == 'ssh'"
    undefined, undeclared = Absent("undefined"), Absent("undeclared")

    both = {"usage.scheme": undefined, "usage.protocol": undefined}
    assert decide(source, {}, both).verdict is Verdict.UNDEFINED
    mixed = {"usage.scheme": undefined, "usage.protocol": undeclared}
    assert decide(source, {}, mixed) == Decision(Verdict.OPEN, ("usage.scheme", "usage.protocol"))
    assert decide(source, {}).missing == ("usage.scheme", "usage.protocol")


def test_missing_leaves_out_what_cannot_decide():
    """An absent fact beside a side that is already decided is not among the missing."""
    source = "(generator.unit || group.cyclic) && usage.scheme == 'dsa'"
    decision = decide(source, {"generator.unit": fact(True)}, {"usage.scheme": Absent("undefined")})

    assert decision == Decision(Verdict.UNDEFINED, ("usage.scheme",))


def test_bounds():
    """A loose bound can make a condition false, but not true."""
    source = "strength.work_bits_at_most >= 112"
    name = "strength.work_bits_at_most"

    assert decide(source, {name: fact(111.99, tight=False)}).verdict is Verdict.FALSE
    assert decide(source, {name: fact(112.0, tight=True)}).verdict is Verdict.TRUE
    assert decide(source, {name: fact(112.0, tight=False)}) == Decision(Verdict.OPEN, (name,))


def test_a_loose_bound_brings_its_questions():
    """A loose bound counts as unsettled, and the questions that would tighten it are named."""
    question = Question(Asks.PRIMALITY, (7,))
    bound = Fact(113.0, Standing.PROVEN, False, questions=(question,))
    view = View({"strength.work_bits_at_most": bound}, {}, VOCABULARY)

    assert view.absence("strength.work_bits_at_most") == Absent("unsettled", questions=(question,))
    assert view.absence("generator.unit") == Absent("unsettled")


def test_the_other_side_may_stand_in_for_a_loose_bound():
    """A loose bound does not matter where the other side makes the condition true."""
    source = "strength.work_bits_at_most >= 112 || modulus.length > 1024"
    name = "strength.work_bits_at_most"
    loose = {name: fact(150.0, tight=False)}

    assert decide(source, {**loose, "modulus.length": fact(2048)}).verdict is Verdict.TRUE
    assert decide(source, {**loose, "modulus.length": fact(1024)}).missing == (name,)
    assert decide(source, loose).missing == (name, "modulus.length")


def test_seen_facts_are_exempt():
    """What was not seen counts as not there, though it can never be excluded."""
    name = "modulus.special_form_seen"

    assert decide(f"!{name}", {name: fact(False, tight=False)}).verdict is Verdict.TRUE
    assert decide(f"!{name}", {name: fact(True, tight=False)}).verdict is Verdict.FALSE


def test_integers_compare_with_reals():
    """An integer fact and a real literal, fact or threshold compare by value."""
    facts = {"modulus.length": fact(2), "strength.work_bits": fact(1.5)}

    assert decide("modulus.length > 1.5", facts).verdict is Verdict.TRUE
    assert decide("strength.work_bits < 2", facts).verdict is Verdict.TRUE
    assert decide("strength.work_bits < modulus.length", facts).verdict is Verdict.TRUE
    assert (
        decide("double(modulus.length) * 0.5 <= strength.work_bits", facts).verdict is Verdict.TRUE
    )
    assert decide("modulus.length - 3 == -1", facts).verdict is Verdict.TRUE


def test_thresholds():
    """values.NAME stands for the book's threshold, whatever its kind and sign."""
    facts = {"modulus.length": fact(2048), "usage.purpose": fact("signature")}
    values = {"least": 2048, "slack": -1.5, "use": "signature", "strict": True}
    view = View(facts, {}, VOCABULARY)
    source = "modulus.length >= values.least && values.slack < 0 && usage.purpose == values.use"

    assert COMPILER.compile(source, values).decide(view).verdict is Verdict.TRUE
    assert COMPILER.compile(source, values | {"least": 2049}).decide(view).verdict is Verdict.FALSE
    strict = COMPILER.compile("values.strict && modulus.length > 1", values)
    assert strict.decide(view).verdict is Verdict.TRUE
    assert strict.names == ("modulus.length",)


# What is refused


@pytest.mark.parametrize(
    ("source", "message"),
    [
        ("modulus.lenght > 1", "did you mean 'modulus.length'"),
        ("length > 1", "no such fact"),
        ("modulus > 1", "no such fact"),
        ("values.widest > 1", "did you mean 'values.widest_leak'"),
        ("group.cycles == 1", "is an exhibit"),
        ("usage.purpose == 'keyagreement'", "did you mean 'key-agreement'"),
        ("'sign' == usage.purpose", "not a value of that fact"),
        ("usage.purpose in ['signature', 'sign']", "not a value of that fact"),
        ("usage.purpose == values.word", "not a value of that fact"),
        ("usage.purpose == 1", "never equal"),
        ("modulus.length == 1.0", "reals are rounded"),
        ("generator.order_bits != 1.0", "reals are rounded"),
        ("modulus.length", "expected a condition that is true or false"),
        ("modulus.length && generator.unit", "takes truth values"),
        ("!modulus.length", "takes truth values"),
        ("modulus.length > true", "compares numbers only"),
        ("usage.purpose < 'z'", "compares numbers only"),
        ("modulus.length + 1.5 > 2", "write double() around one"),
        ("-generator.unit", "expected a number"),
        ("double(usage.purpose) > 1", "expected a number"),
        ("modulus.length * modulus.length * modulus.length > 1", "64-bit"),
        ("generator.unit in [1]", "cannot be in a list"),
        ("generator.order_bits in [1.0]", "cannot be in a list"),
        ("modulus.length in [1, 'a']", "of one kind"),
        ("modulus.length in usage.purpose", "a list of literals"),
        ("modulus.length in [usage.message_length]", "a literal of the list"),
        ("modulus.length in []", "a literal of the list"),
        ("modulus.special_form_seen", "may still come true"),
        ("strength.work_bits_at_most <= 112", "may still fall"),
        ("!(strength.work_bits_at_most >= 112)", "may still fall"),
        ("exponent.public_leak_bits_at_least > 1", "may still rise"),
        ("1 < exponent.public_leak_bits_at_least", "may still rise"),
        ("group.unfactored_length_at_most == 0", "may still fall"),
        ("0 - group.unfactored_length_at_most > -1", "may still fall"),
        ("-group.unfactored_length_at_most > -1", "may still fall"),
        ("group.unfactored_length_at_most * -1 > -1", "may still fall"),
        ("group.unfactored_length_at_most * modulus.length > 1", "may still fall"),
        ("group.unfactored_length_at_most in [0, 1]", "may still fall"),
        ("(strength.work_bits_at_most >= 1) == generator.unit", "may still fall"),
        ("double(group.unfactored_length_at_most) < 1.0", "may still fall"),
        ("has(generator.unit)", "has() would turn"),
        ("size(usage.purpose) > 1", "the only function is double()"),
        ("usage.purpose.startsWith('k')", "the only function is double()"),
        ("int(generator.order_bits) > 1", "int() would hide"),
        ("generator.unit ? true : false", "write the choice"),
        ("modulus.length / 2 > 1", "multiply the other side"),
        ("modulus.length % 2 == 0", "remainders"),
        ("generator.unit & group.cyclic", "write &&"),
        ("generator.unit | group.cyclic", "write ||"),
        ("modulus.length = 1", "write =="),
        ("usage.purpose == 'a\\'b'", "refused"),
        ("usage.purpose == 'signature", "refused"),
        ("modulus.length > 0x10", "found 'x10'"),
        ("modulus.length > 1u", "found 'u'"),
        ("modulus.length > 1e3", "found 'e3'"),
        ("modulus.length > 2147483648", "below 2^31"),
        ("modulus.length > 99999999999999999999999999", "below 2^31"),
        ("1 < modulus.length < 3", "do not chain"),
        ("generator.unit // comment", "multiply the other side"),
        ("generator.unit; true", "not part of the language"),
        ("generator.unit group.cyclic", "found 'group.cyclic'"),
        ("generator.unit &&", "found the end"),
        ("(generator.unit", "')' was expected"),
        ("", "found the end"),
        ("   ", "found the end"),
        ("modulus['length'] > 1", "found '['"),
        ("!" * (DEEPEST + 1) + "generator.unit", "nested"),
        ("(" * (DEEPEST + 1) + "generator.unit" + ")" * (DEEPEST + 1), "nested"),
        ("modulus.length" + " + 1" * DEEPEST + " > 1", "nested"),
        ("generator.unit" + " && generator.unit" * LONGEST, "longer than"),
    ],
)
def test_refused(source, message):
    """What cannot be analysed or bounded is refused at load, with a hint."""
    with pytest.raises(ConditionError) as caught:
        COMPILER.compile(source, {"widest_leak": 1.0, "word": "sign"})
    assert message in str(caught.value)


@pytest.mark.parametrize(
    "source",
    [
        "strength.work_bits_at_most >= 112",
        "112 <= strength.work_bits_at_most",
        "!(strength.work_bits_at_most < 112)",
        "exponent.public_leak_bits_at_least <= 1.0",
        "exponent.public_leak_bits_at_least * -1.0 >= -1.0",
        "1.0 - exponent.public_leak_bits_at_least >= 0.0",
        "!modulus.special_form_seen || strength.special_number_field_sieve_bits_at_most >= 112",
        "modulus.standard_group in ['ffdhe2048', 'modp2048']",
        "generator.unit" + " && generator.unit" * 90,
        'usage.purpose == "signature"',
    ],
)
def test_accepted(source):
    """A requirement that more search can only turn from true to false is taken."""
    assert COMPILER.compile(source).names


def test_all_problems_of_a_condition_are_told():
    """One run names every problem, each with the part it concerns."""
    with pytest.raises(ConditionError) as caught:
        COMPILER.compile("modulus.lenght > 1 && usage.purpose == 'x' && group.cycles == 2")

    assert len(caught.value.problems) == 3
    assert caught.value.problems[0].startswith("modulus.lenght: ")


@given(st.text(alphabet="ab.1'\"()[]!&|<>=+-*, in\t\né", max_size=40))
def test_the_parser_only_parses_or_refuses(source):
    """Any text gives a tree or a refusal with a place in it."""
    try:
        place = parse(source).end
    except SyntaxProblem as problem:
        place = problem.start
    assert 0 <= place <= len(source)


@pytest.mark.parametrize(
    ("name", "value"),
    [
        ("modulus.length", 2**31),
        ("modulus.length", 1.5),
        ("modulus.length", True),
        ("generator.unit", 1),
        ("generator.order_bits", float("nan")),
        ("generator.order_bits", "3"),
        ("usage.purpose", 3),
    ],
)
def test_facts_of_another_kind_are_refused(name, value):
    """A value that the evaluator would misread never reaches it."""
    with pytest.raises(ValueError, match=name):
        View({name: fact(value)}, {}, VOCABULARY)


def test_a_view_is_over_the_vocabulary():
    """Unknown facts, and facts both present and absent, are refused."""
    with pytest.raises(ValueError, match="not in the vocabulary"):
        View({"a.b": fact(1)}, {}, VOCABULARY)
    with pytest.raises(ValueError, match="not in the vocabulary"):
        View({}, {"a.b": Absent("undefined")}, VOCABULARY)
    with pytest.raises(ValueError, match="both"):
        View({"group.cyclic": fact(True)}, {"group.cyclic": Absent("unsettled")}, VOCABULARY)

    View({"group.cycles": fact([2**4000, 6])}, {}, VOCABULARY)
