"""Writes the numbers of sample documents in the forms that tools use, into ``encoded``.

``python samples/encode.py [DIRECTORY]`` writes them again, byte for byte; the configuration and the
usage file beside them are written by hand. Names, hosts and uses are invented.
"""

import base64
import sys
from pathlib import Path

from cryptography.hazmat import asn1

from auditor.declaration import Declaration
from auditor.intake import der
from auditor.intake.tree import read_inputs

HERE = Path(__file__).parent
SIGNING = "lock-gate signing"


def encoded() -> dict[str, str]:
    """The files by name."""
    sets = {item.name: item for item in read_inputs(map(str, HERE.glob("*.yaml"))).declarations}
    crane, tug, gate = (sets[name] for name in ("crane enrolment", "tug dispatch", SIGNING))
    return {
        "parameters.pem": "Parameters of three links, as their administrators sent them.\n\n"
        + pem("X9.42 DH PARAMETERS", x942(crane))
        + pem(
            "DH PARAMETERS",
            der.DHParameter(prime=tug.modulus, base=tug.generator, private_value_length=256),
        )
        + pem(
            "DSA PARAMETERS",
            der.DssParms(p=gate.modulus, q=gate.subgroup_order or 0, g=gate.generator),
        ),
        "moduli": "# Time Type Tests Tries Size Generator Modulus\n"
        f"20260301120000 2 6 100 {tug.modulus.bit_length() - 1} {tug.generator:X} "
        f"{tug.modulus:X}\n",
        "beacon.c": "/* Pairing of the buoy beacons. */\n"
        + array("beacon_dh_p", sets["dredger log"].modulus)
        + array("beacon_dh_g", sets["dredger log"].generator),
    }


def x942(group: Declaration) -> der.DomainParameters:
    """The X9.42 structure of a group with a declared order."""
    q = group.subgroup_order or 0
    return der.DomainParameters(
        p=group.modulus, g=group.generator, q=q, j=(group.modulus - 1) // q, validation=None
    )


def pem(label: str, structure: object) -> str:
    """One PEM block."""
    text = base64.b64encode(asn1.encode_der(structure)).decode()
    lines = [text[at : at + 64] for at in range(0, len(text), 64)]
    return "\n".join([f"-----BEGIN {label}-----", *lines, f"-----END {label}-----", ""])


def array(name: str, value: int) -> str:
    """A byte array of C."""
    data = value.to_bytes((value.bit_length() + 7) // 8, "big")
    lines = [data[at : at + 12] for at in range(0, len(data), 12)]
    rows = ",\n    ".join(", ".join(f"0x{byte:02x}" for byte in line) for line in lines)
    return f"static const unsigned char {name}[{len(data)}] = {{\n    {rows}\n}};\n"


if __name__ == "__main__":
    directory = Path(sys.argv[1]) if len(sys.argv) > 1 else HERE / "encoded"
    for name, text in encoded().items():
        (directory / name).write_text(text, encoding="utf-8")
