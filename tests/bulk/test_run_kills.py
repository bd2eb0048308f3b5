"""Reviews that are killed and resumed, as processes."""

from pathlib import Path

from tests.robustness.kills import run_with_kills


def test_killed_reviews_end_with_the_report_of_an_undisturbed_one(tmp_path: Path) -> None:
    """A few random kills; twenty and more: python -m tests.robustness.kills."""
    tally = run_with_kills(tmp_path, kills=3, seed=4)

    assert not tally.wrong
    assert sum(tally.kills.values()) == 3
    assert tally.finished >= 1
