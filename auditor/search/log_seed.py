"""Numbers drawn from a seed: the same on every machine and Python, whatever ran before."""

from hashlib import shake_256

from gmpy2 import mpz


def drawn(below: int, *label: int | str) -> int:
    """A number in [0, below) that the label determines; the bias is under 2^-64."""
    text = "/".join(part if isinstance(part, str) else hex(part) for part in label)
    size = mpz(below).bit_length() // 8 + 9
    return int.from_bytes(shake_256(text.encode()).digest(size), "big") % int(below)
