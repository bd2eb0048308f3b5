"""The examples of rules, executed: what a rule says it does, it must do.

Facts that an example does not list are unsettled. The examples of an inherited rule belong to the
book that wrote it and run there, since another book may have moved the thresholds.
"""

from auditor.rulebooks.conditions import View, Vocabulary
from auditor.rulebooks.judging import evaluate
from auditor.rulebooks.rulebook import Example, Problem, Rule, Rulebook


def failures(book: Rulebook, vocabulary: Vocabulary) -> tuple[Problem, ...]:
    """Every example of the book and of those it extends that does not behave, with its place."""
    found = failures(book.extends, vocabulary) if book.extends else ()
    return found + tuple(
        problem for rule in own_rules(book) for problem in rule_failures(rule, vocabulary)
    )


def own_rules(book: Rulebook) -> tuple[Rule, ...]:
    """The rules that the book does not inherit."""
    inherited = {rule.id for rule in book.extends.rules} if book.extends else frozenset()
    return tuple(rule for rule in book.rules if rule.id not in inherited)


def rule_failures(rule: Rule, vocabulary: Vocabulary) -> tuple[Problem, ...]:
    """The examples of one rule that do not behave."""
    problems = (_failure(rule, example, vocabulary) for example in rule.examples)
    return tuple(problem for problem in problems if problem)


def _failure(rule: Rule, example: Example, vocabulary: Vocabulary) -> Problem | None:
    outcome, missing = evaluate(rule, View(example.facts, example.absent, vocabulary))
    if outcome == example.outcome:
        return None
    waits = f", waiting for {', '.join(missing)}" if missing else ""
    message = f"example of {rule.id}: expected {example.outcome}, but it is {outcome}{waits}"
    return Problem(example.place, message + _advice(rule, example))


def _advice(rule: Rule, example: Example) -> str:
    """Which facts of the rule the example leaves out, and which it lists for nothing."""
    stated = example.facts.keys() | example.absent.keys()
    left_out = [name for name in rule.names if name not in stated]
    idle = sorted(stated - set(rule.names))
    parts = [f"it leaves out {', '.join(left_out)}"] if left_out else []
    parts += [f"the rule does not name {', '.join(idle)}"] if idle else []
    return f" ({'; '.join(parts)})" if parts else ""
