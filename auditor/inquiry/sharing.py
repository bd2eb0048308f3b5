"""Factors that the numbers of one run share: found by greatest common divisors, at next to no cost.

Two moduli with a common prime fall together, and the unfactored parts of two group orders that
share a factor are factored by it, far beyond what curves reach. Source: Bernstein, "How to find
smooth parts of integers", 2004; Heninger et al., USENIX Security 2012 (both from memory).
"""

from collections.abc import Iterable

from auditor.claims.factorization import Factorization
from auditor.inquiry.answers import Answers
from auditor.questions import Asks, Question
from auditor.search.batch_gcd import shared_factors, threads


def share_among_moduli(moduli: Iterable[int], answers: Answers) -> bool:
    """Use what distinct moduli have in common to factor them; whether less is left then."""
    numbers = sorted({n for n in moduli if n > 1})
    return _use({n: [n] for n in numbers}, answers)


def share_among_rests(answers: Answers) -> bool:
    """The same for the composite numbers that searches have left unfactored."""
    holders: dict[int, list[int]] = {}
    for n in sorted({claim.n for claim in answers.claims if isinstance(claim, Factorization)}):
        best = answers.claims.factorization(n)
        if best is not None and best.rest > 1:
            holders.setdefault(best.rest, []).append(n)
    return _use(holders, answers)


def _use(holders: dict[int, list[int]], answers: Answers) -> bool:
    """Factor the holders of each number by the factor that it shares with another one."""
    numbers = sorted(holders)
    found = False
    with threads(answers.cores.jobs) as executor:
        shared = shared_factors(numbers, executor) if len(numbers) > 1 else {}
    for index, (factor, _) in sorted(shared.items()):
        if not 1 < factor < numbers[index]:
            continue
        for n in holders[numbers[index]]:
            before = _rest(n, answers)
            answers.answer(Question(Asks.SMALL_FACTORS, (n, factor)))
            found |= _rest(n, answers) < before
    return found


def _rest(n: int, answers: Answers) -> int:
    """What is left unfactored. A shared factor that splits it into composite parts leaves it as it
    was: claims tell of primes and of one rest."""
    known = answers.claims.factorization(n)
    return n if known is None else known.rest
