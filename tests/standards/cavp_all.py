"""Runs every case of NIST's files on the origin of p and q; ends with status 1 at a disagreement.

Run it as ``python -m tests.standards.cavp_all``; the test suite runs a part of the cases.
"""

import sys
import time
from collections import Counter

from tests.standards.test_cavp_origin import answered
from tests.standards.vectors import origin_cases


def main() -> int:
    """Compare and count."""
    counts: Counter[tuple[str, str]] = Counter()
    wrong, start = [], time.process_time()
    for case in origin_cases():
        found = answered(case)[0].outcome
        counts[case.recipe.method, found.value] += 1
        if found is not case.expected:
            wrong.append(f"{case.name}: {found.value}, not {case.expected.value}")
    for (method, outcome), count in sorted(counts.items()):
        print(f"{count:4} {method}: {outcome}")
    print(*wrong, sep="\n" if wrong else "")
    print(f"{counts.total()} cases, {len(wrong)} disagree, {time.process_time() - start:.0f} s")
    return 1 if wrong else 0


if __name__ == "__main__":
    sys.exit(main())
