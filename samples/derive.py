"""Where the home-made numbers of the samples come from: labels, hashed.

Every number is a function of its label by SHA-256, so that anybody can make it again and see that
nothing was chosen. ``python samples/derive.py`` prints them all; a test compares a part of it with
the sample documents. The numbers are for demonstration only.
"""

import hashlib

import gmpy2
import sympy

SIEVE = tuple(sympy.primerange(3, 20_000))


def bits_from(label: str, bits: int) -> int:
    """An integer of exactly ``bits`` bits: the label hashed with a counter, top bit set."""
    blocks = -(-bits // 256)
    text = b"".join(hashlib.sha256(f"{label}/{block}".encode()).digest() for block in range(blocks))
    value = int.from_bytes(text, "big") >> (256 * blocks - bits)
    return value | 1 << (bits - 1)


def prime(label: str, bits: int) -> int:
    """The least prime from the label's integer upwards."""
    return int(gmpy2.next_prime(bits_from(label, bits) - 1))


def safe_prime(label: str, bits: int) -> int:
    """The least p >= the label's integer with p and (p-1)/2 prime."""
    q = bits_from(label, bits - 1) | 1
    residues = [(small, q % small) for small in SIEVE]
    step = 0
    while True:
        clear = all(
            (residue + step) % small and (2 * (residue + step) + 1) % small
            for small, residue in residues
        )
        if clear and gmpy2.powmod(2, q + step - 1, q + step) == 1:
            p = 2 * (q + step) + 1
            if gmpy2.is_prime(q + step, 30) and gmpy2.is_prime(p, 30):
                return p
        step += 2


def with_subgroup(label: str, bits: int, q: int) -> int:
    """The least prime p = 1 modulo 2q from the label's integer upwards."""
    start = bits_from(label, bits)
    p = start - start % (2 * q) + 2 * q + 1
    while not gmpy2.is_prime(p, 30):
        p += 2 * q
    return p


def element_of_order(p: int, q: int) -> int:
    """The (p-1)/q-th power of the least base for which that is not 1: an element of order q."""
    base = 2
    while (g := int(gmpy2.powmod(base, (p - 1) // q, p))) == 1:
        base += 1
    return g


def smooth_prime(label: str, bits: int, largest: int) -> tuple[int, list[int]]:
    """A prime p with p-1 twice a product of primes of ``largest`` bits, and those primes."""
    count = (bits - 1) // largest
    factors = [prime(f"{label}/factor {index}", largest) for index in range(count)]
    body = 2
    for factor in factors:
        body *= factor
    index = 0
    while True:
        last = prime(f"{label}/last {index}", bits - body.bit_length())
        p = body * last + 1
        if p.bit_length() == bits and gmpy2.is_prime(p, 30):
            return p, sorted([2, *factors, last])
        index += 1


def fips_primes(label: str, bits: int, order_bits: int) -> tuple[int, int, bytes, int]:
    """p, q, the seed and the counter of FIPS 186-4, A.1.1.2, with SHA-256, from a label's seeds."""
    blocks = -(-bits // 256) - 1
    top = bits - 1 - 256 * blocks
    attempt = 0
    while True:
        seed = hashlib.sha256(f"{label}/seed {attempt}".encode()).digest()
        attempt += 1
        u = _hashed(seed, 0) % 2 ** (order_bits - 1)
        q = 2 ** (order_bits - 1) + u + 1 - u % 2
        if not gmpy2.is_prime(q, 30):
            continue
        for counter in range(4 * bits):
            first = 1 + counter * (blocks + 1)
            w = sum(_hashed(seed, first + j) << 256 * j for j in range(blocks))
            w += (_hashed(seed, first + blocks) % 2**top) << 256 * blocks
            x = w + 2 ** (bits - 1)
            p = x - (x % (2 * q) - 1)
            if p.bit_length() == bits and gmpy2.is_prime(p, 30):
                return p, q, seed, counter


def _hashed(seed: bytes, offset: int) -> int:
    value = (int.from_bytes(seed, "big") + offset) % 2 ** (8 * len(seed))
    return int.from_bytes(hashlib.sha256(value.to_bytes(len(seed), "big")).digest(), "big")


def canonical_generator(p: int, q: int, seed: bytes, index: int) -> int:
    """The generator of FIPS 186-4, A.2.3, with SHA-256."""
    count = 1
    while True:
        text = seed + b"ggen" + bytes([index]) + count.to_bytes(2, "big")
        w = int.from_bytes(hashlib.sha256(text).digest(), "big")
        g = int(gmpy2.powmod(w, (p - 1) // q, p))
        if g > 1:
            return g
        count += 1


if __name__ == "__main__":
    crane_q = prime("crane enrolment q", 256)
    crane_p = with_subgroup("crane enrolment p", 2048, crane_q)
    gate_q = prime("lock gate signing q", 256)
    gate_p = with_subgroup("lock gate signing p", 3072, gate_q)
    tug_p = safe_prime("tug dispatch p", 2048)
    tide_n = prime("tide gauge first", 1024) * prime("tide gauge second", 1024)
    dredge_p, dredge_factors = smooth_prime("dredger log p", 2048, 40)
    ferry_p = prime("ferry timetable p", 2048)
    lamp_p, lamp_q, lamp_seed, lamp_counter = fips_primes("signal lamp", 2048, 256)
    print(f"signal lamp seed: {lamp_seed.hex()}, counter: {lamp_counter}")
    for name, value in sorted(
        {
            "crane enrolment q": crane_q,
            "crane enrolment p": crane_p,
            "crane enrolment g": element_of_order(crane_p, crane_q),
            "lock gate signing q": gate_q,
            "lock gate signing p": gate_p,
            "lock gate signing g": element_of_order(gate_p, gate_q),
            "tug dispatch p": tug_p,
            "tide gauge n": tide_n,
            "dredger log p": dredge_p,
            "ferry timetable p": ferry_p,
            "signal lamp p": lamp_p,
            "signal lamp q": lamp_q,
            "signal lamp g": canonical_generator(lamp_p, lamp_q, lamp_seed, 1),
        }.items()
    ):
        print(f"{name}: {value:#x}")
