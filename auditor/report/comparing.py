"""A comparison of two reports as text."""

from auditor.compare import Comparison
from auditor.report.text import visible
from auditor.report.words import plural


def render(found: Comparison) -> str:
    """Changes of the run, then those of each set; marked where they are for the worse."""
    lines = [f"run: {visible(change.text)}" for change in found.run]
    for item in found.sets:
        lines.append(visible(item.identity))
        lines += [
            f"  {'worse: ' if change.worse else ''}{visible(change.text)}"
            for change in item.changes
        ]
    lines.append(f"{plural(found.unchanged, 'set')} unchanged")
    return "\n".join(lines) + "\n"
