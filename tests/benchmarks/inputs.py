"""Inputs that nobody chose: primes derived from labels by a hash."""

import hashlib

import gmpy2


def prime(label: str, bits: int) -> int:
    """The first prime at or above the number that SHAKE-256 of the label spells.

    Its two highest bits are set, so that a product of two has the sum of their lengths.
    """
    raw = hashlib.shake_256(label.encode()).digest((bits + 7) // 8)
    number = int.from_bytes(raw, "big") >> (-bits % 8)
    return int(gmpy2.next_prime((number | 3 << (bits - 2)) - 1))


def prime_of_digits(label: str, digits: int) -> int:
    """The first prime above a number of so many decimal digits spelt by SHAKE-256 of the label."""
    raw = int.from_bytes(hashlib.shake_256(label.encode()).digest(digits), "big")
    return int(gmpy2.next_prime(10 ** (digits - 1) + raw % (8 * 10 ** (digits - 1))))


def composite(number: int, bits: int = 2048) -> int:
    """Composite ``number`` of the set that timings use: two primes of half the length each."""
    half = bits // 2
    return prime(f"composite {number} left", half) * prime(f"composite {number} right", half)


def with_factor(factor: int, number: int, bits: int) -> int:
    """``factor`` times a composite of ``bits`` bits without small factors."""
    return (
        factor
        * prime(f"cofactor {number} left", bits // 2)
        * prime(f"cofactor {number} right", bits - bits // 2)
    )
