"""Reviews that are killed and resumed, as processes."""

from pathlib import Path

from auditor.search import gmp_ecm
from tests.robustness.kills import DASK_WORKER, PROGRAM, VICTIMS, run_with_kills


def test_killed_reviews_end_with_the_report_of_an_undisturbed_one(tmp_path: Path) -> None:
    """Each victim once; twenty times and more: python -m tests.robustness.kills."""
    kills = {victim: 1 for victim in VICTIMS if victim != PROGRAM or gmp_ecm.installed()}
    tally = run_with_kills(tmp_path, kills, seed=4, sets=3)

    assert not tally.wrong
    assert DASK_WORKER in kills
    assert {victim: count for victim, count in tally.kills.items() if count} == kills
    assert tally.finished >= len(kills)
