"""A tree of real things, and what other readers than ours find in it.

The records of a moduli(5) file, the Diffie-Hellman, DSA and X.509 files of the package
cryptography-vectors, and a dozen invented configuration files. The moduli file is read by splitting
its lines, the encoded files by the library cryptography, which is other code for the same
structures.
"""

import re
import shutil
import warnings
from base64 import b64decode
from collections import Counter
from collections.abc import Callable, Iterable, Iterator
from importlib.resources import files
from pathlib import Path
from typing import Any

from cryptography import x509
from cryptography.exceptions import UnsupportedAlgorithm
from cryptography.hazmat.primitives import serialization
from cryptography.hazmat.primitives.asymmetric import dsa

from tests.intake.der_writer import integer
from tests.standards import configurations

with warnings.catch_warnings():
    warnings.simplefilter("ignore")
    from cryptography.hazmat.primitives.asymmetric import dh

Place = tuple[str, int, int]
"""Path below the tree, modulus, generator."""

VECTORS = Path(str(files("cryptography_vectors")))
FOLDERS = (
    "asymmetric/DH",
    "asymmetric/DSA/custom",
    "asymmetric/DER_Serialization",
    "asymmetric/OpenSSH",
    "asymmetric/PEM_Serialization",
    "asymmetric/PKCS8",
    "asymmetric/Traditional_OpenSSL_Serialization",
    "asymmetric/public",
    "x509",
)

REFUSED_BY_THE_LIBRARY = {
    "asymmetric/DH/dh_key_256.pem": "less than 512 bits",
    "asymmetric/PEM_Serialization/dsaparam.pem": "it has no reader for DSA parameters",
    "asymmetric/Traditional_OpenSSL_Serialization/dsa-wrong-version.pem": "version 17",
    "x509/custom/dsa_null_alg_params.pem": "a NULL beside the name of the signature",
}
"""Files with a group that the library does not read. That the numbers are in them can be seen."""

DAMAGED = frozenset(
    {"x509/cryptography.io.with_garbage.pem", "x509/cryptography.io.chain_with_garbage.pem"}
)
"""Files that say by their names that part of them cannot be read."""


def build(folder: Path, records: Iterable[str]) -> Counter[Place]:
    """Write the tree below ``folder``; every set that other readers find in it.

    Files that the library refuses are not counted (:func:`in_refused_files`).
    """
    for name in FOLDERS:
        shutil.copytree(VECTORS / name, folder / "vectors" / name)
    expected = Counter(
        (f"vectors/{path.relative_to(VECTORS).as_posix()}", p, g)
        for path in _key_files()
        for p, g in sorted(groups(path.read_bytes()))
    )
    expected += build_primes(folder, records)
    found = configurations.write(folder / "configuration")
    expected.update({(f"configuration/{name}", p, g): n for (name, p, g), n in found.items()})
    return expected


def build_primes(folder: Path, records: Iterable[str]) -> Counter[Place]:
    """The same with the records alone."""
    lines = list(records)
    path = folder / "primes" / "moduli"
    path.parent.mkdir(parents=True)
    path.write_text("\n".join(["# primes", *lines, ""]), "utf-8")
    return Counter(("primes/moduli", p, g) for p, g in map(record_numbers, lines))


def reviewed(record: dict[str, Any], folder: Path) -> Counter[Place]:
    """Every set of a report, in the same words."""
    return Counter(
        (
            Path(item["source"]["path"]).relative_to(folder).as_posix(),
            _integer(item["declaration"]["modulus"]),
            _integer(item["declaration"]["generator"]),
        )
        for item in record["parameter_sets"]
    )


def in_refused_files(found: Counter[Place]) -> Counter[Place]:
    """What was found in the files that the library refuses, as far as both integers are in the
    file as X.690, 8.3 encodes them."""
    seen: Counter[Place] = Counter()
    for (name, p, g), count in found.items():
        inside = name.removeprefix("vectors/")
        if inside in REFUSED_BY_THE_LIBRARY:
            data = _binary((VECTORS / inside).read_bytes())
            if integer(p) in data and integer(g) in data:
                seen[name, p, g] = count
    return seen


def records_of(text: str) -> list[str]:
    """The lines of a moduli(5) file that are records."""
    return [line for line in text.splitlines() if line.strip() and not line.startswith("#")]


def record_numbers(line: str) -> tuple[int, int]:
    """Modulus and generator of a record: the last two of seven fields, in hexadecimal."""
    *_, generator, modulus = line.split()
    return int(modulus, 16), int(generator, 16)


def spread(records: list[str], count: int | None, longest: int) -> list[str]:
    """At most so many records up to that many bits, evenly spread over the file."""
    fitting = [line for line in records if record_numbers(line)[0].bit_length() <= longest]
    if count is None or count >= len(fitting):
        return fitting
    return [fitting[i * len(fitting) // count] for i in range(count)]


def groups(data: bytes) -> set[tuple[int, int]]:
    """The finite-field groups of all keys that the library can load from ``data``."""
    found = set()
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        for load in _LOADERS:
            try:
                keys = load(data)
            except (ValueError, TypeError, UnsupportedAlgorithm, x509.InvalidVersion):
                continue
            found |= {group for key in keys if (group := _group(key)) is not None}
    return found


_LOADERS: tuple[Callable[[bytes], list[object]], ...] = (
    lambda data: [item.public_key() for item in x509.load_pem_x509_certificates(data)],
    lambda data: [x509.load_der_x509_certificate(data).public_key()],
    lambda data: [x509.load_pem_x509_csr(data).public_key()],
    lambda data: [x509.load_der_x509_csr(data).public_key()],
    lambda data: [serialization.load_pem_public_key(data)],
    lambda data: [serialization.load_der_public_key(data)],
    lambda data: [serialization.load_pem_private_key(data, None)],
    lambda data: [serialization.load_der_private_key(data, None)],
    lambda data: [serialization.load_pem_parameters(data)],
    lambda data: [serialization.load_der_parameters(data)],
    lambda data: [serialization.load_ssh_public_key(data)],
)


def _group(key: object) -> tuple[int, int] | None:
    match key:
        case dh.DHParameters() | dsa.DSAParameters():
            numbers = key.parameter_numbers()
        case dh.DHPublicKey() | dsa.DSAPublicKey() | dh.DHPrivateKey() | dsa.DSAPrivateKey():
            numbers = key.parameters().parameter_numbers()
        case _:
            return None
    return numbers.p, numbers.g


def _key_files() -> Iterator[Path]:
    for name in FOLDERS:
        yield from (path for path in sorted((VECTORS / name).rglob("*")) if path.is_file())


def _integer(value: int | str) -> int:
    return int(value, 16) if isinstance(value, str) else value


def _binary(data: bytes) -> bytes:
    """The bytes of a PEM block without its armour."""
    return b64decode(re.sub(rb"-----[^\n]*-----|\s", b"", data))
