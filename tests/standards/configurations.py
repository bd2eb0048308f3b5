"""A dozen invented configuration files, and the groups that a reader finds in them.

The numbers of the groups come from the formulas of RFC 2409, 6.1 and RFC 7919, A, with the digits
of mpmath and the published offsets in ``tests/data/standard_groups.yaml``.
"""

from collections import Counter
from functools import cache
from pathlib import Path
from typing import Any

import mpmath

from auditor.strict_yaml import load

TABLE = Path(__file__).parent.parent / "data" / "standard_groups.yaml"

FILES = {
    "ssh/sshd_config": (
        "# Remote maintenance of the lock gates.\n"
        "Port 22\n"
        "KexAlgorithms curve25519-sha256,diffie-hellman-group15-sha512,"
        "diffie-hellman-group14-sha256\n"
        "Ciphers aes256-gcm@openssh.com\n"
    ),
    "ssh/ssh_config": (
        "Host crane-*\n"
        "    # the cranes know nothing better than diffie-hellman-group1-sha1\n"
        "    KexAlgorithms +diffie-hellman-group14-sha1\n"
    ),
    "ssh/negotiated": "KexAlgorithms diffie-hellman-group-exchange-sha256\n",
    "tunnel/pilot.conf": (
        "conn pilot-station\n"
        "  keyexchange = ikev2\n"
        "  ike = aes256-sha384-modp3072\n"
        "  esp = aes256gcm16-ecp384\n"
    ),
    "tunnel/gate.cfg": (
        "crypto ikev2 proposal GATE\n"
        " encryption aes-cbc-256\n"
        " group 14 19\n"
        "crypto ipsec profile GATE\n"
        " set pfs group15\n"
    ),
    "web/openssl.cnf": "[ssl]\nGroups = x25519:ffdhe2048:ffdhe3072\nMinProtocol = TLSv1.2\n",
    "web/edge.yaml": (
        "listen: 443\nsupported_groups:\n  - secp256r1\n  - ffdhe3072\nretired: [ffdhe8192]\n"
    ),
    "links.yaml": (
        "auditor: 1\n"
        "parameter_sets:\n"
        "  - {name: quay link, purpose: key-agreement, modulus: {group: ffdhe2048}}\n"
        "  - name: archive\n"
        "    purpose: encryption\n"
        "    modulus: {group: modp2048}\n"
    ),
    "gauges.json": (
        '{"auditor": 1, "parameter_sets": [{"name": "gauges", "modulus": 4294967291, '
        '"generator": 2}]}\n'
    ),
    "usage.yaml": (
        "auditor-usage: 1\n"
        "uses:\n"
        "  - {path: ssh/*, exponent: {bits: 256, use: single}, peer_check: [range]}\n"
    ),
    "notes/groups.md": (
        "Use `Groups = ffdhe2048` at least; never\n\n    KexAlgorithms diffie-hellman-group1-sha1\n"
    ),
    "build/package.json": '{"name": "harbour", "group": 14, "modulus": "none", "prime": true}\n',
    "build/table.csv": "length,group\n1024,modp1024\n2048,modp2048\n",
    "src/window.c": "static const unsigned char rsa_modulus[4] = {0xff, 0xff, 0xff, 0xfb};\n",
}
"""Path to text. Comments, prose, tables, elliptic curves and negotiated groups name no group."""

NAMED = {
    "ssh/sshd_config": ("modp3072", "modp2048"),
    "ssh/ssh_config": ("modp2048",),
    "tunnel/pilot.conf": ("modp3072",),
    "tunnel/gate.cfg": ("modp2048", "modp3072"),
    "web/openssl.cnf": ("ffdhe2048", "ffdhe3072"),
    "web/edge.yaml": ("ffdhe3072",),
    "links.yaml": ("ffdhe2048", "modp2048"),
}
"""Path to the standard groups in it; all have the generator 2."""


def write(folder: Path) -> Counter[tuple[str, int, int]]:
    """Write the files below ``folder``; path, modulus and generator of each set in them."""
    for name, text in FILES.items():
        path = folder / name
        path.parent.mkdir(parents=True, exist_ok=True)
        path.write_text(text, encoding="utf-8")
    found = Counter((name, prime(group), 2) for name, groups in NAMED.items() for group in groups)
    found["gauges.json", 2**32 - 5, 2] += 1
    return found


@cache
def _published() -> dict[str, dict[str, Any]]:
    return {record["name"]: record for record in load(TABLE.read_text("utf-8")).value}


@cache
def prime(name: str) -> int:
    """The modulus of a group by its formula, term by term as printed."""
    row = _published()[name]
    bits, offset = row["bits"], row["offset"]
    with mpmath.workprec(bits + 64):
        digits = int(mpmath.floor(mpmath.ldexp(+getattr(mpmath, row["constant"]), bits - 130)))
    if row["constant"] == "pi":
        return int(2**bits - 2 ** (bits - 64) - 1 + 2**64 * (digits + offset))
    return int(2**bits - 2 ** (bits - 64) + (digits + offset) * 2**64 - 1)
