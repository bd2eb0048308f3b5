"""The trees give what comparing each modulus with the product of the others gives, exactly."""

import multiprocessing
import random
from collections.abc import Iterator
from concurrent.futures import Executor, ProcessPoolExecutor, ThreadPoolExecutor
from math import gcd, prod
from pathlib import Path
from typing import Any

import pytest
import yaml
from hypothesis import given
from hypothesis import strategies as st

from auditor.search.batch_gcd import batch_gcd, shared_factors

DATA = Path(__file__).parents[1] / "data" / "batch_gcd.yaml"
CASES = [
    pytest.param(case, id=case["id"])
    for case in yaml.safe_load(DATA.read_text(encoding="utf-8"))["cases"]
]

primes = st.sampled_from([2, 3, 5, 7, 11, 2**61 - 1, 2**89 - 1, 2**127 - 1, 2**521 - 1])
moduli = st.lists(st.lists(primes, max_size=3).map(prod), max_size=40)


def by_definition(numbers: list[int]) -> list[int]:
    """The greatest common divisors, one by one."""
    everything = prod(numbers)
    return [gcd(n, everything // n) for n in numbers]


def random_moduli(count: int) -> list[int]:
    """Numbers of 1 to 700 bits, so that the trees are uneven, the same in each run."""
    draw = random.Random(count)
    return [draw.getrandbits(draw.randrange(1, 700)) | 1 for _ in range(count)]


@pytest.fixture(scope="module")
def processes() -> Iterator[Executor]:
    """Two fresh processes."""
    with ProcessPoolExecutor(2, mp_context=multiprocessing.get_context("spawn")) as pool:
        yield pool


@pytest.mark.parametrize("case", CASES)
def test_listed_collections(case: dict[str, Any]) -> None:
    """The listed values come out, from the trees and from the definition."""
    assert batch_gcd(case["moduli"]) == by_definition(case["moduli"]) == case["gcds"]
    assert shared_factors(case["moduli"]) == {i: tuple(x) for i, x in case["shared"].items()}


@given(moduli)
def test_trees_agree_with_the_definition(numbers: list[int]) -> None:
    """Whatever the sizes, repetitions and common factors."""
    assert batch_gcd(numbers) == by_definition(numbers)


@given(moduli)
def test_shared_factors_are_complete_and_proper(numbers: list[int]) -> None:
    """Exactly the moduli that share with a different one are listed, each with the common divisor
    it has with another, a proper one if any pair has one."""
    commons = [[gcd(n, m) for m in set(numbers) - {n}] for n in numbers]

    shared = shared_factors(numbers)

    assert set(shared) == {i for i, row in enumerate(commons) if any(g > 1 for g in row)}
    for i, (factor, other) in shared.items():
        assert factor == gcd(numbers[i], numbers[other]) > 1
        assert numbers[i] != numbers[other]
        assert factor < numbers[i] or all(g in (1, numbers[i]) for g in commons[i])


@pytest.mark.parametrize("count", [2, 3, 31, 32, 33, 500])
def test_uneven_trees_are_exact(count: int) -> None:
    """Numbers of very different lengths, in groups of equal and unequal size."""
    numbers = random_moduli(count)

    assert batch_gcd(numbers) == by_definition(numbers)


@given(moduli)
def test_threads_change_nothing(numbers: list[int]) -> None:
    """The executor only says where the work is done."""
    with ThreadPoolExecutor(3) as pool:
        assert batch_gcd(numbers, pool) == batch_gcd(numbers)


def test_processes_change_nothing(processes: Executor) -> None:
    """Subtrees travel to other processes and back unharmed."""
    numbers = random_moduli(300)

    assert batch_gcd(numbers, processes) == batch_gcd(numbers)
    assert shared_factors(numbers, processes) == shared_factors(numbers)


@pytest.mark.parametrize("numbers", [[0], [15, 0], [15, -3, 7]])
def test_moduli_are_positive(numbers: list[int]) -> None:
    """Zero would make every product zero; it is refused, as is a negative number."""
    with pytest.raises(ValueError, match="below 1"):
        batch_gcd(numbers)
    with pytest.raises(ValueError, match="below 1"):
        shared_factors(numbers)
