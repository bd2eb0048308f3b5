"""How likely a search finds a factor of a given size, and how likely it missed one.

Every statement here assumes that the number searched was not chosen against the search: that its
factors are those of a random number. Somebody who wants a factor to be missed can have it missed.

Model: the order of one of our curves modulo a prime r of b bits (r = 2^(b - 1/2); for D digits
10^(D - 1/2)) is as smooth as a random number of size N = r / 23.4. With alpha = ln N / ln B1,
beta = ln B2 / ln B1, Dickman's rho and Euler's gamma a curve finds r with probability

    P = s(alpha, ln N) + integral from 1 to beta of s(alpha - x, ln N - x ln B1) dx / x,
    s(u, L) = rho(u) - gamma rho(u - 1) / L for u > 1, else 1.

It reproduces the expected numbers of curves 1/P in the README of GMP-ECM, table 1, within 3 %.
Sources: B. Dodson and P. Zimmermann, "20 years of ECM", ANTS 2006; the correction with gamma is
the second term of the smoothness count (de Bruijn; from memory), without which the table is missed
by 15 to 20 %.
"""

from dataclasses import dataclass
from functools import lru_cache
from math import exp, log

from auditor.search.work import Work

EULER_GAMMA = 0.5772156649015329
EXTRA_SMOOTHNESS = 23.4
TERMS = 40
PIECES = 20
INTERVALS = 16
ASSUMPTION = "the number was not chosen to hide factors from this search"


@lru_cache(maxsize=1)
def _dickman_pieces() -> tuple[tuple[float, ...], ...]:
    """Coefficients of rho(k - x), 0 <= x <= 1, by powers of x, for k = 1, 2, ...

    Source: E. Bach and R. Peralta, "Asymptotic semismoothness probabilities", Math. Comp. 65, 1996,
    from u rho'(u) = -rho(u - 1); formulas rederived.
    """
    pieces: list[tuple[float, ...]] = [(1.0,) + (0.0,) * (TERMS - 1)]
    for k in range(2, PIECES + 1):
        before = pieces[-1]
        rising = [sum(before[j] / k ** (i - j) for j in range(i)) / i for i in range(1, TERMS)]
        # u rho(u) is the integral of rho over [u - 1, u]; at u = k this gives the constant term.
        constant = sum(c / (i + 2) for i, c in enumerate(rising)) / (k - 1)
        pieces.append((constant, *rising))
    return tuple(pieces)


def dickman(u: float) -> float:
    """Dickman's rho: the share of numbers N without a prime factor above N^(1/u).

    1 up to u = 1; 0 from u = 20, where it is below 10^-28.
    """
    if u <= 1:
        return 1.0
    if u >= PIECES:
        return 0.0
    k = int(u) + 1
    value = 0.0
    for coefficient in reversed(_dickman_pieces()[k - 1]):
        value = value * (k - u) + coefficient
    return value


def _smooth(u: float, log_n: float) -> float:
    if u <= 1:
        return 1.0
    return max(0.0, dickman(u) - EULER_GAMMA * dickman(u - 1) / log_n)


@lru_cache(maxsize=4096)
def success_per_curve(b1: int, b2: int, log_factor: float) -> float:
    """The probability that one curve with these bounds finds a given prime factor.

    ``log_factor`` is the natural logarithm of the factor.
    """
    log_n = log_factor - log(EXTRA_SMOOTHNESS)
    if log_n <= log(b1):
        return 1.0
    alpha = log_n / log(b1)
    width = log(log(max(b1, b2)) / log(b1))  # the integral over dx / x, by t = ln x

    def integrand(t: float) -> float:
        x = exp(t)
        return _smooth(alpha - x, log_n - x * log(b1))

    step = width / INTERVALS
    simpson = sum(
        weight * integrand(i * step)
        for i, weight in enumerate((1, *(4, 2) * (INTERVALS // 2 - 1), 4, 1))
    )
    return min(1.0, _smooth(alpha, log_n) + simpson * step / 3)


def log_of_digits(digits: int) -> float:
    """Natural logarithm of a typical factor of so many decimal digits."""
    return (digits - 0.5) * log(10)


def log_of_bits(bits: int) -> float:
    """Natural logarithm of a typical factor of so many bits."""
    return (bits - 0.5) * log(2)


def expected_curves(b1: int, b2: int, digits: int) -> float:
    """Curves after which a factor of so many digits is found with probability 63 %."""
    chance = success_per_curve(b1, b2, log_of_digits(digits))
    return 1 / chance if chance else float("inf")


def miss(work: Work, log_factor: float) -> float:
    """The probability that the elliptic curves of ``work`` missed a given prime factor.

    0 for factors that trial division reached. p-1, p+1 and rho only lower it and are left out.
    """
    if work.trial_bound and log_factor < log(work.trial_bound):
        return 0.0
    hits = sum(c.count * success_per_curve(c.b1, c.b2, log_factor) for c in work.curves)
    return exp(-hits)


def searched_digits(work: Work) -> int:
    """The most decimal digits for which a factor was missed with probability 1/e at most, here and
    at all lower sizes."""
    digits = 0
    while miss(work, log_of_digits(digits + 1)) <= exp(-1):
        digits += 1
    return digits


@dataclass(frozen=True, slots=True)
class MissedFactors:
    """What may have been missed in a composite rest.

    ``expected`` prime factors in the window of ``window`` = (from, to) bits are still undiscovered
    on average; ``risk`` is the probability of at least one, on the ``assumption``.
    """

    window: tuple[int, int]
    expected: float
    risk: float
    assumption: str = ASSUMPTION


def missed_factor_risk(
    work: Work, window: tuple[int, int], composite_bits: int | None = None
) -> MissedFactors:
    """The risk that a composite rest still has a prime factor between 2^a and 2^b.

    ``window`` is (a, b) with 0 < a <= b. A random number has on average ln(b/a) prime factors in
    it (Mertens); each size is weighted with its chance of being missed. ``composite_bits`` is the
    length of the rest, known to be composite: the risk is then divided by the probability that a
    number without the factors searched for is composite, 1 - e^gamma a / bits. Where b exceeds a
    third of that length the model does not hold and the risk is 1, the trivial bound. Raises
    ValueError for an empty or negative window.
    """
    low, high = window
    if not 0 < low <= high:
        raise ValueError("a window goes from a positive number of bits to a larger one")
    expected = sum(log((i + 1) / i) * miss(work, log_of_bits(i + 1)) for i in range(low, high))
    if composite_bits is None:
        return MissedFactors(window, expected, 1 - exp(-expected))
    if 3 * high > composite_bits:
        return MissedFactors(window, expected, 1.0)
    composite = 1 - exp(EULER_GAMMA) * _searched_bits(work) / composite_bits
    risk = (1 - exp(-expected)) / composite if composite > 0 else 1.0
    return MissedFactors(window, expected, min(1.0, risk))


def _searched_bits(work: Work) -> int:
    """The most bits for which a factor was missed with probability 1/2 at most."""
    bits = 1
    while miss(work, log_of_bits(bits + 1)) <= 0.5:
        bits += 1
    return bits
