"""Did the searches go as far as the run says?

That a search was made nobody can check: its record is attested. But which questions a review of
that effort would not have left open, and how far it would have gone with them, follows from the
report; records that fall short of it were made with less effort.
"""

from collections.abc import Iterable, Sequence

from auditor.attested import furthest
from auditor.claims.collection import Claims
from auditor.declaration import Declaration
from auditor.facts import establish, vocabulary
from auditor.facts.given import Shared
from auditor.inquiry.settle import open_questions
from auditor.questions import Asks, Question
from auditor.report.set_record import in_use
from auditor.rulebooks.judging import Judging
from auditor.rulebooks.rulebook import Rulebook
from auditor.run_values import RunValues
from auditor.search.plan import Plan, plan_for
from auditor.search.special_form import looked_for
from auditor.search.work import Work

SEARCHES = (Asks.FACTORIZATION, Asks.MODULUS_FACTORS, Asks.SPECIAL_FORM, Asks.LEAST_OFFSET)
"""What is answered by search alone, and from which effort on."""


def shortfalls(
    declarations: Iterable[Declaration], claims: Claims, run: RunValues, books: Sequence[Rulebook]
) -> list[tuple[Question, str]]:
    """The questions that a run of this effort would have pursued further, each with what falls
    short; none at quick effort, which searches for nothing."""
    if run.effort == "quick":
        return []
    judging, shared = Judging(books, vocabulary()), Shared(run)
    questions: set[Question] = set()
    for item in dict.fromkeys(declaration.nameless for declaration in declarations):
        known = establish(item, claims, run, shared)
        questions |= set(open_questions(known, in_use(judging, known.facts, known.absent)))
    told = ((question, shortfall(question, claims, run)) for question in sorted(questions))
    return [(question, text) for question, text in told if text]


def shortfall(question: Question, claims: Claims, run: RunValues) -> str:
    """What falls short about one question that is open at this effort; empty for nothing."""
    n = question.integers[0]
    match question.asks:
        case Asks.FACTORIZATION | Asks.MODULUS_FACTORS:
            found = furthest(claims, question.integers[1])
            if found is None:
                # No fact rests on a record of it, so the report has none to show.
                return ""
            record, work = found
            plan = plan_for(run.effort, run.factor_digits)
            plan = plan.for_modulus() if question.asks is Asks.MODULUS_FACTORS else plan
            plan = plan.for_length(n.bit_length())
            return "" if carried_out(plan, work) else f"{record.id} searched less"
        case Asks.SPECIAL_FORM:
            form = claims.form_searched(n)
            tiers = (1, 2, 3) if run.effort == "thorough" else (1, 2)
            due = {item.tier for item in looked_for(n, tiers)}
            if form is None:
                return "no search is recorded"
            return "" if due <= set(form.tiers) else f"{form.id} searched less"
        case Asks.LEAST_OFFSET if run.effort == "thorough":
            return "no offset was excluded"
    return ""


def carried_out(plan: Plan, work: Work) -> bool:
    """Whether the work is all that the plan asks for, method by method."""
    starts = work.p_plus_1_starts if work.p_plus_1 == plan.p_plus_1 else plan.p_plus_1_starts
    return (
        work.trial_bound >= plan.trial_bound
        and work.complete_digits >= plan.complete_digits
        and work.fermat_steps >= plan.fermat_steps
        and work.rho_iterations >= plan.rho_iterations
        and work.p_minus_1 >= plan.p_minus_1
        and work.p_plus_1 >= plan.p_plus_1
        and starts >= plan.p_plus_1_starts
        and all(work.count(level.b1, level.b2) >= level.curves for level in plan.levels)
    )
