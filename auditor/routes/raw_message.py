"""Route: meet in the middle on short messages that ElGamal multiplies in as they are."""

from auditor.routes.base import Closed, Model, Unit, Work

ROUTE = "raw_message"
MODEL = Model("meet in the middle on two factors of the message", "heuristic")
SOURCE = (
    "Boneh, Joux and Nguyen, Why textbook ElGamal and RSA encryption are insecure, "
    "ASIACRYPT 2000 (cited from memory)"
)

SPLITTING_SHARES = ((40, 0.20), (64, 0.17), (128, 0.15))
"""Length b and share of the numbers below 2^b that are a product of two numbers of at most 2^(b/2):
measured on 20,000, 8,000 and 800 random numbers. The share falls slowly with b."""


def raw_message(message_bits: int, cofactor_bits: float) -> Work | Closed:
    """One message of ``message_bits`` encrypted by raw ElGamal, without the private key.

    ``cofactor_bits`` is log2 of the index of <g> in the group of units.

    Attacker: passive. Formula: 2 * 2^(message_bits / 2): in (m y^k)^ord(g) = m^ord(g) the mask
    is gone, and where m = m1 m2 with both factors of at most message_bits / 2, a table of the
    powers of all m1 meets the quotients by those of all m2; powers of composites are products
    of powers of primes. Unit: group multiplications. Preconditions: the message is multiplied
    in as an integer, unpadded and not encoded into <g>; the cofactor is at least 2^message_bits,
    so that powers tell messages apart. About one message in six splits so; others fall to less even
    splits at a higher price. Source: Boneh, Joux and Nguyen 2000, cited from memory.
    """
    if cofactor_bits < message_bits:
        return Closed(
            ROUTE, "passive", "the cofactor is too small to tell messages of this size apart"
        )
    return Work(
        route=ROUTE,
        attacker="passive",
        bits=1 + message_bits / 2,
        unit=Unit.GROUP_MULTIPLICATIONS,
        model=MODEL,
        source=SOURCE,
        explanation=(
            f"A raw {message_bits}-bit message is found from its ciphertext alone whenever it is "
            "a product of two halves, without touching any key."
        ),
        details=(
            ("message length", message_bits),
            ("share of messages that split in equal halves", _splitting_share(message_bits)),
        ),
    )


def _splitting_share(message_bits: int) -> float:
    """The share measured at the largest length that is not above, or at the smallest."""
    shares = [share for length, share in SPLITTING_SHARES if length <= message_bits]
    return shares[-1] if shares else SPLITTING_SHARES[0][1]
