"""Factors that moduli of a collection share, found in nearly linear time.

With P the product of all moduli, N shares a factor with the others exactly when gcd(P/N mod N, N)
exceeds 1. Bernstein's remainder tree modulo the squares of all nodes gives P/N mod N ("How to find
smooth parts of integers", 2004); here two of his ideas make it cheaper:

* P/N mod N is also the sum of all P/M modulo N, M over all moduli, since every other term vanishes.
  That sum over P is the sum of the reciprocals 1/M, and needs half the precision of the squares.
* The tree is scaled ("Scaled remainder trees", 2004): a node S holds not a remainder but the
  fraction of (product outside S) * (sum of 1/M over M in S), in binary. To step down is one
  multiplication by the sibling and a shift; there are no divisions but two at the top.

A node of b bits is known to b + GUARD bits. A step down at most doubles the error in units of the
last place, and adds one: after d steps it is below 2^(d+1), far below 2^GUARD, so that rounding at
a leaf gives the exact remainder.
"""

from collections.abc import Callable, Iterable, Sequence
from concurrent.futures import Executor, ThreadPoolExecutor
from itertools import pairwise
from typing import Any, NamedTuple

import gmpy2
from gmpy2 import mpz

GUARD = 64
GROUPS = 16
"""Into as many subtrees the collection is cut at most, whatever the executor: a power of two."""

Run = Callable[..., list[Any]]
Tree = list[list[mpz]]
"""The products of a subtree: leaves first, its root last."""


class Reciprocals(NamedTuple):
    """The sum of 1/M over some moduli M, as a fraction over their product."""

    numerator: mpz
    product: mpz


class Scaled(NamedTuple):
    """A fraction of 1: numerator / 2^precision."""

    numerator: mpz
    precision: int


class SharedFactor(NamedTuple):
    """The greatest common divisor with the modulus at index ``other``; above 1."""

    factor: int
    other: int


def threads(jobs: int) -> ThreadPoolExecutor:
    """An executor for :func:`batch_gcd` whose threads multiply side by side.

    GMP runs without the interpreter's lock in them, and nothing is copied between processes, which
    for numbers of megabytes costs more than it gains.
    """
    return ThreadPoolExecutor(jobs, initializer=_release_the_lock)


def _release_the_lock() -> None:
    gmpy2.get_context().allow_release_gil = True


def batch_gcd(moduli: Sequence[int], executor: Executor | None = None) -> list[int]:
    """For each modulus its greatest common divisor with the product of all others.

    1: it shares nothing. The modulus itself: all its prime factors occur in others, or it occurs
    twice. The products of all levels are kept: with what is computed from them about 35 times the
    size of the collection. The result does not depend on the executor, whose processes take
    subtrees. Raises ValueError for a modulus below 1.
    """
    if any(n < 1 for n in moduli):
        raise ValueError("a modulus is below 1")
    if len(moduli) < 2:
        return [1] * len(moduli)
    run = _in_order(executor)
    numerators, trees = zip(*run(_grown, _groups(moduli)), strict=True)
    roots = [Reciprocals(n, tree[-1][0]) for n, tree in zip(numerators, trees, strict=True)]
    gcds = run(_leaf_gcds, trees, _fractions(roots, run))
    return [g for group in gcds for g in group]


def shared_factors(
    moduli: Sequence[int], executor: Executor | None = None
) -> dict[int, SharedFactor]:
    """A factor, and another modulus that has it, for each modulus that shares one.

    Equal moduli count as one: all of them have an entry if they share a factor with a different
    modulus, and none otherwise. The factor is a proper one whenever the greatest common divisor
    with some other modulus is. Moduli whose common factors are not just those of another one are
    compared with all that share something, which takes quadratic time in a collection made for it.
    Raises ValueError for a modulus below 1.
    """
    first: dict[int, int] = {}
    for index, n in enumerate(moduli):
        first.setdefault(n, index)
    gcds = dict(zip(first, batch_gcd(list(first), executor), strict=True))
    sharing = [n for n, g in gcds.items() if g > 1]
    twins: dict[int, list[int]] = {}
    for n in sharing:
        twins.setdefault(gcds[n], []).append(n)
    partners = {n: _partner(n, gcds[n], twins[gcds[n]], sharing) for n in sharing}
    return {
        index: SharedFactor(int(gmpy2.gcd(n, partners[n])), first[partners[n]])
        for index, n in enumerate(moduli)
        if n in partners
    }


def _partner(n: int, g: int, twins: list[int], sharing: list[int]) -> int:
    """A modulus that shares a proper factor with n; if there is none, one that n divides.

    Two moduli with the same g < n have it in common: that saves nearly all comparisons.
    """
    if g < n and len(twins) > 1:
        return twins[1] if twins[0] == n else twins[0]
    multiple = n
    for other in sharing:
        common = gmpy2.gcd(n, other) if other != n else 1
        if 1 < common < n:
            return other
        if common == n and multiple == n:
            multiple = other
    return multiple


def _in_order(executor: Executor | None) -> Run:
    """map() into a list, here or by the executor; results are in the order of the arguments."""
    if executor is None:
        return lambda function, *arguments: list(map(function, *arguments))

    def run(function: Callable[..., Any], *arguments: Iterable[Any]) -> list[Any]:
        futures = [executor.submit(function, *each) for each in zip(*arguments, strict=True)]
        return [future.result() for future in futures]

    return run


def _groups(moduli: Sequence[int]) -> list[Sequence[int]]:
    """Neighbours, in a number of groups that is a power of two from 2 to GROUPS."""
    count = min(GROUPS, 1 << (len(moduli).bit_length() - 1))
    bounds = [len(moduli) * i // count for i in range(count + 1)]
    return [moduli[start:end] for start, end in pairwise(bounds)]


def _grown(moduli: Sequence[int]) -> tuple[mpz, Tree]:
    """The subtree over these moduli, and the numerator at its root."""
    nodes = [Reciprocals(mpz(1), mpz(n)) for n in moduli]
    tree = [[node.product for node in nodes]]
    while len(nodes) > 1:
        odd = nodes[-1:] if len(nodes) % 2 else []
        nodes = [*map(_combined, nodes[::2], nodes[1::2]), *odd]
        tree.append([node.product for node in nodes])
    return nodes[0].numerator, tree


def _combined(left: Reciprocals, right: Reciprocals) -> Reciprocals:
    return Reciprocals(
        left.numerator * right.product + right.numerator * left.product,
        left.product * right.product,
    )


def _fractions(nodes: list[Reciprocals], run: Run) -> list[Scaled]:
    """The fractions at the nodes of one level; how many there are is a power of two."""
    products = [node.product for node in nodes]
    siblings = [products[i ^ 1] for i in range(len(nodes))]
    if len(nodes) == 2:
        return run(_outermost, nodes, siblings)
    parents = _fractions(run(_combined, nodes[::2], nodes[1::2]), run)
    above = [parents[i // 2] for i in range(len(nodes))]
    return run(_stepped_down, above, products, siblings)


def _outermost(own: Reciprocals, other: mpz) -> Scaled:
    """The fraction of other * own: the only place where large numbers are divided."""
    precision = own.product.bit_length() + GUARD
    scaled = (other % own.product) * own.numerator << precision
    return Scaled(gmpy2.f_mod_2exp(scaled // own.product, precision), precision)


def _stepped_down(above: Scaled, product: mpz, sibling: mpz) -> Scaled:
    """The fraction at the node with that product, from that of its parent."""
    precision = product.bit_length() + GUARD
    fraction = gmpy2.f_mod_2exp(above.numerator * sibling, above.precision)
    return Scaled(fraction >> (above.precision - precision), precision)


def _leaf_gcds(tree: Tree, root: Scaled) -> list[int]:
    """The result for the leaves of a subtree, from the fraction at its root."""
    fractions = [root]
    for products in reversed(tree[:-1]):
        fractions = [
            _stepped_down(fractions[i // 2], product, products[i ^ 1])
            if i ^ 1 < len(products)
            else fractions[i // 2]
            for i, product in enumerate(products)
        ]
    return [_leaf_gcd(n, fraction) for n, fraction in zip(tree[0], fractions, strict=True)]


def _leaf_gcd(n: mpz, fraction: Scaled) -> int:
    half = mpz(1) << (fraction.precision - 1)
    remainder = (fraction.numerator * n + half) >> fraction.precision
    return int(gmpy2.gcd(remainder, n))
