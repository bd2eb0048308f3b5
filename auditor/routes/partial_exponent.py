"""Learning an exponent in part, modulo small factors, and searching for what is left.

An exponent x in [0, 2^w) becomes known modulo z through small subgroups: *passively*, by
logarithms of a public value in subgroups of <g>, or by *probes*, values of small order sent to
whoever uses x again and again. Then x = x0 + z k, and kangaroos look for k in an interval of
2^w / z values (van Oorschot and Wiener, EUROCRYPT 1996; Lim and Lee, CRYPTO 1997). Both routes
that do this minimise over which factors are worth their price, and both do it here.

Of either kind, take a set of primes that lacks one smaller than its largest. With the costs of
:mod:`auditor.routes.searches`, adding the smaller one or putting it in place of the largest is no
dearer: one of the two always. So the least total over all sets is the least over prefixes of the
ascending lists, and it never rises when a factor becomes known.

An exponent wider than ord(g) hides behind its multiples: probes help only when 2^w / z falls
below the order, and until then logarithms in all of <g> are cheaper, which is one of the ways.
"""

import math
from bisect import bisect_left
from collections.abc import Callable, Iterator
from dataclasses import dataclass
from itertools import accumulate

from auditor.routes.base import log2_sum
from auditor.routes.factors import Factors
from auditor.routes.pohlig_hellman import pohlig_hellman_bits
from auditor.routes.searches import kangaroo_bits, subgroup_bits, trial_bits


@dataclass(frozen=True, slots=True)
class Split:
    """One way to divide the work; all figures are base-2 logarithms, counts excepted.

    ``logarithms`` and ``probes`` say how many primes, with multiplicity, were used passively
    and by probing; ``known_bits`` and ``probed_bits`` how much of the exponent that gives;
    ``trials_bits`` the trials spent on probes; ``left_bits`` the width of what is left and
    ``search_bits`` the cost of that search.
    """

    bits: float
    logarithms: int
    probes: int
    known_bits: float
    probed_bits: float
    trials_bits: float
    left_bits: float
    search_bits: float


class Splits:
    """All ways to learn an exponent of ``width`` bits to a base of the given ``order``.

    ``probes`` are the primes, with multiplicity, whose digits can be learnt by probing beyond
    those that ``order`` gives away.
    """

    def __init__(self, width: float, order: Factors, probes: tuple[int, ...] = ()) -> None:
        self._width = width
        self._order = order
        self._logarithms = _Prefixes(order.primes, subgroup_bits)
        self._probes = _Prefixes(tuple(sorted(probes)), trial_bits)

    def cheapest(self) -> Split:
        """The split of least work; of equal ones that with fewest probes."""
        return min(self._candidates(), key=lambda split: (split.bits, split.probes))

    def at(self, logarithms: int, probes: int) -> Split:
        """The split that uses so many of the smallest primes of either kind."""
        passive, active = self._logarithms, self._probes
        known = passive.gain[logarithms] + active.gain[probes]
        left = self._width - known
        search = kangaroo_bits(left)
        total = log2_sum(passive.cost[logarithms], active.cost[probes], search)
        return Split(
            bits=max(0.0, total),
            logarithms=logarithms,
            probes=probes,
            known_bits=known,
            probed_bits=active.gain[probes],
            trials_bits=active.cost[probes],
            left_bits=max(0.0, left),
            search_bits=search,
        )

    def _candidates(self) -> Iterator[Split]:
        yield self._everything()
        for logarithms in range(len(self._logarithms)):
            yield self.at(logarithms, self._best_probes(logarithms))

    def _best_probes(self, logarithms: int) -> int:
        """Best number of probes with so many logarithms: the total falls, then rises."""
        return bisect_left(
            range(len(self._probes) - 1),
            True,
            key=lambda n: self.at(logarithms, n + 1).bits >= self.at(logarithms, n).bits,
        )

    def _everything(self) -> Split:
        """Logarithms in all of <g>, the unfactored rest taken for one prime: nothing is left."""
        return Split(
            bits=pohlig_hellman_bits(self._order),
            logarithms=len(self._logarithms) - 1 + (not self._order.complete),
            probes=0,
            known_bits=self._order.bits,
            probed_bits=0.0,
            trials_bits=-math.inf,
            left_bits=0.0,
            search_bits=-math.inf,
        )


class _Prefixes:
    """Gain and cost, in bits, of the first 0, 1, 2, … of an ascending list of primes."""

    def __init__(self, primes: tuple[int, ...], price: Callable[[int], float]) -> None:
        self.gain = list(accumulate((math.log2(prime) for prime in primes), initial=0.0))
        self.cost = list(accumulate(map(price, primes), log2_sum, initial=-math.inf))

    def __len__(self) -> int:
        return len(self.gain)
