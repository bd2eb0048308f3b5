"""Rho takes powers back at the work stated, whoever walks its trails."""

from collections.abc import Callable, Iterator
from concurrent.futures import Executor, Future, ProcessPoolExecutor, ThreadPoolExecutor
from functools import partial
from multiprocessing import get_context
from statistics import mean
from typing import Any

import pytest
import sympy
from gmpy2 import mpz

from auditor.search.log_seed import drawn
from auditor.search.logarithm import (
    NotFound,
    OutOfBudget,
    Tally,
    rho,
)
from tests.search.groups import of_order, prime_group


@pytest.mark.parametrize("bits", [8, 14, 20, 26])
def test_rho_takes_powers_back(bits: int) -> None:
    """Drawn exponents in groups of prime order are found, whatever the seed."""
    n, g, q = prime_group(bits, 4)
    for seed in range(6):
        x = drawn(q, "rho", bits, seed)
        found = rho(n, g, pow(g, x, n), q, seed=seed)
        assert (found.value, found.modulus) == (x, q)


def test_work_of_rho() -> None:
    """On average sqrt(pi q / 2) operations, within what the branches and trails add."""
    n, g, q = prime_group(28, 5)
    runs = [rho(n, g, pow(g, 10**6 + s, n), q, seed=s).operations for s in range(40)]

    assert 0.85 < mean(runs) / (1.5708 * q) ** 0.5 < 1.55


class Backwards(Executor):
    """An executor that does nothing until a result is asked for, and then the newest unit first."""

    def __init__(self) -> None:
        self.waiting: list[tuple[Future[Any], Callable[[], Any]]] = []

    def submit(self, fn: Any, /, *args: Any, **kwargs: Any) -> Future[Any]:
        """Put the call off."""
        future = Asked(self)
        self.waiting.append((future, partial(fn, *args, **kwargs)))
        return future


class Asked(Future[Any]):
    """A future that has all waiting calls made when it is asked for its result."""

    def __init__(self, executor: Backwards) -> None:
        super().__init__()
        self.executor = executor

    def result(self, timeout: float | None = None) -> Any:
        """The result, once the newer calls have been made."""
        while self.executor.waiting:
            future, call = self.executor.waiting.pop()
            future.set_result(call())
        return super().result(timeout)


def executors() -> Iterator[Executor]:
    """Threads, the newest first, and processes."""
    yield ThreadPoolExecutor(3)
    yield Backwards()
    yield ProcessPoolExecutor(2, mp_context=get_context("spawn"))


def test_an_executor_changes_nothing() -> None:
    """Whoever walks the trails, the logarithm and the count of operations are the same."""
    n, g, q = prime_group(30, 6)
    h = pow(g, 123456789, n)
    alone = rho(n, g, h, q, seed=7)
    for executor in executors():
        with executor:
            assert rho(n, g, h, q, seed=7, executor=executor) == alone


def test_rho_refuses_an_element_of_another_order() -> None:
    """An element outside the group of the base is not found; that is certain at once."""
    n, g, q = prime_group(30, 6)
    outside = next(a for a in range(2, n) if pow(a, q, n) != 1)
    with pytest.raises(NotFound):
        rho(n, g, outside, q)


def test_rho_by_budget() -> None:
    """An element that only looks like a member exhausts the budget, and says nothing else."""
    one, g, q = prime_group(16, 8)
    other = next(p for p in range(2 * q + 1, 10**9, 2 * q) if p != one and sympy.isprime(p))
    n = one * other
    lifted = 1 + other * ((g - 1) * pow(other, -1, one) % one)
    elsewhere = of_order(q, other)
    h = 1 + one * ((elsewhere - 1) * pow(one, -1, other) % other)

    with pytest.raises(OutOfBudget) as stopped:
        rho(n, lifted, h, q, tally=Tally(50_000))
    assert 50_000 < stopped.value.operations < 60_000


def test_drawn_numbers_depend_on_their_label_alone() -> None:
    """The same label gives the same number, another label another; all lie in the range."""
    assert drawn(2**64, 1, "a") == drawn(2**64, 1, "a") == drawn(mpz(2**64), mpz(1), "a")
    assert len({drawn(2**64, 1, "a", i) for i in range(100)}) == 100
    assert {drawn(3, i) for i in range(50)} == {0, 1, 2}
