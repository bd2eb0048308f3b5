"""64-bit fingerprints of many products modulo n at a fraction of the price of the products.

A baby-step giant-step search forms many group elements only to compare them. For that the leading
bits of u v / n modulo 1 do as well as the residue u v mod n, and they are cheap. Write
u = sum of u_i 2^(40 i); then

    u v / n = sum of u_i (2^(40 i) v / n)    modulo 1,

and the fractions in brackets depend on v alone. They are kept to 128 bits for a whole row of
elements v, side by side in one long integer for each i, so that one multiplication of a word by
a long integer serves the row. The idea of reading an index off the leading bits of a product
that is never computed is that of Cheon, Hong, Kim, "Accelerating Pollard's rho algorithm on
finite fields", J. Cryptology 25 (2012) (from memory).

The bits below those kept, and what spills over from the neighbour below, disturb a fraction by
less than 2^-76 for every modulus below 2^65536. Two fingerprints of one element therefore agree
unless its fraction lies that close to a multiple of 2^-64, where the rounding may fall on either
side: about one element in 2^17 at 2048 bits. Shifting all fractions by half of 2^-64 (``shifted``)
moves those elements away from the edge, so what is missed without the shift is not missed with
it. Different elements may share a fingerprint; a match must be verified.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from struct import Struct

from gmpy2 import mpz

PIECE_BYTES = 5
LANE_BYTES = 16


@dataclass(frozen=True, slots=True)
class Row:
    """Elements v_0, v_1, ... modulo n, prepared for fingerprints of u v_0, u v_1, ..."""

    width: int
    weights: tuple[mpz, ...]
    offset: mpz

    def fingerprints(self, u: int) -> tuple[int, ...]:
        """The fingerprint of u v modulo n for each v of the row, for 0 <= u < n."""
        pieces, total = u.to_bytes(PIECE_BYTES * len(self.weights), "little"), self.offset
        for i, weight in enumerate(self.weights):
            start = PIECE_BYTES * i
            total += int.from_bytes(pieces[start : start + PIECE_BYTES], "little") * weight
        lanes = total.to_bytes(LANE_BYTES * (self.width + 1), "little")
        return _upper_halves(self.width).unpack_from(lanes)


def prepare(elements: Sequence[int], n: int, shifted: bool = False) -> Row:
    """The row of these elements modulo n. Fingerprints of rows compare if equally shifted."""
    count = -(-n.bit_length() // (8 * PIECE_BYTES))
    size = PIECE_BYTES * (count - 1) + LANE_BYTES
    quotients = [((mpz(v) << 8 * size) // n).to_bytes(size, "little") for v in elements]
    starts = range(size - LANE_BYTES, -1, -PIECE_BYTES)
    weights = (b"".join([q[s : s + LANE_BYTES] for q in quotients]) for s in starts)
    half = (1 << 63).to_bytes(LANE_BYTES, "little") * len(elements) if shifted else b""
    return Row(
        len(elements),
        tuple(mpz.from_bytes(weight, "little") for weight in weights),
        mpz.from_bytes(half, "little"),
    )


def _upper_halves(width: int) -> Struct:
    return Struct("<" + "8xQ" * width)
