"""What is worth asking, as text: the effect of each answer, the next step of each search."""

from collections.abc import Iterable, Iterator

from auditor.advice.ask import Asked, Effect, MoreSearch
from auditor.report.text import visible


def render(asked: Iterable[Asked]) -> str:
    """A paragraph for each set, in the order given."""
    return "\n".join(line for item in asked for line in [*_set(item), ""])


def _set(item: Asked) -> Iterator[str]:
    yield visible(f"{item.declaration.identity}: {item.outlook.text()}")
    yield from (_effect(effect) for effect in item.effects)
    yield from (_search(search) for search in item.searches)
    if not item.effects and not item.searches:
        yield "  no answer would change this"


def _effect(effect: Effect) -> str:
    condition = " and ".join(
        (effect.answers[0], *(a.removeprefix("if ") for a in effect.answers[1:]))
    )
    before, after = effect.before, effect.after
    moves = [] if after.position == before.position else [f"{before.position} to {after.position}"]
    if after.bits != before.bits or after.loose != before.loose:
        moves.append(f"{_bits(before.bits, before.loose)} to {_bits(after.bits, after.loose)} bits")
    return visible(f"  {condition}: {', '.join(moves)}")


def _bits(bits: float | None, loose: bool) -> str:
    return "unknown" if bits is None else f"{'at most ' if loose else ''}{bits:.2f}"


def _search(search: MoreSearch) -> str:
    low, high = search.window
    return (
        f"  about {_duration(search.minutes)} of elliptic curves ({search.level.curves} with "
        f"B1 = {search.level.b1}): the risk of a missed factor of {low} to {high} bits falls from "
        f"{100 * search.risk_before:.0f} % to {100 * search.risk_after:.0f} %"
    )


def _duration(minutes: float) -> str:
    """Of work on one core, to one or two figures: the model behind it is no better than that."""
    seconds = 60 * minutes
    for size, unit in ((3600, "core-hours"), (60, "core-minutes")):
        if seconds >= 2 * size:
            return f"{seconds / size:.0f} {unit}"
    return f"{max(1, seconds):.0f} core-seconds"
