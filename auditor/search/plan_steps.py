"""A long search in steps, so that an interruption costs no more than one of them."""

from dataclasses import replace

from auditor.search.plan import FULL_LENGTH, Plan
from auditor.search.work import Work

STEP = 250_000
"""Curves in one step, times their first bound: about half a minute at 2048 bits."""


def next_part(plan: Plan, done: Work, length: int) -> Plan:
    """The plan, ending where the next :data:`STEP` of curves ends; the plan itself when that is
    all of it. Followed until then, the parts amount to the plan.

    ``done`` is what was searched so far in a number of ``length`` bits. Beyond the length at which
    plans shrink by themselves a plan is left whole.
    """
    if length > FULL_LENGTH:
        return plan
    left, levels = STEP, []
    for level in plan.levels:
        ran = done.count(level.b1, level.b2)
        if ran >= level.curves:
            levels.append(level)
            continue
        end = min(level.curves, ran + max(1, left // level.b1))
        levels.append(replace(level, curves=end))
        left -= (end - ran) * level.b1
        if end < level.curves or left <= 0:
            break
    return replace(plan, levels=tuple(levels))
