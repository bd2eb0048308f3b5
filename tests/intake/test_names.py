"""Names of groups in configuration: where the context is certain, and only there."""

import pytest
from hypothesis import given
from hypothesis import strategies as st

from auditor.intake import names
from auditor.intake.names import read_names
from auditor.intake.standard_groups import standard_groups

Found = tuple[str, int, int, str | None, int]


def _found(text: str) -> list[tuple[str, int, str | None]]:
    result = read_names(text, "etc/config")
    assert result.errors == ()
    assert all(item.purpose == "key-agreement" for item in result.declarations)
    return [(item.name, item.modulus.bit_length(), item.protocol) for item in result.declarations]


SSH = {
    "KexAlgorithms diffie-hellman-group1-sha1": 1024,
    "KexAlgorithms +diffie-hellman-group14-sha1": 2048,
    "kexalgorithms ^diffie-hellman-group14-sha256,curve25519-sha256": 2048,
    "    KexAlgorithms = curve25519-sha256,diffie-hellman-group15-sha512": 3072,
    "ExecStart=/usr/sbin/daemon -oKexAlgorithms=diffie-hellman-group16-sha512 -D": 4096,
    "ssh -p 22 -o KexAlgorithms=diffie-hellman-group17-sha512 quay": 6144,
    "GSSAPIKexAlgorithms gss-group18-sha512-toWM5Slw5Ew8Mqkay+al2g==": 8192,
    '"kex": ["diffie-hellman-group14-sha256"],': 2048,
    "ssh_kex_algorithms:\n  - diffie-hellman-group14-sha256\n  - curve25519-sha256\n": 2048,
    "key_exchange = [\n  'ecdh-sha2-nistp256',\n  'diffie-hellman-group14-sha1',\n]": 2048,
    "kexAlgorithms: 'diffie-hellman-group14-sha256'  # for the old crane": 2048,
    '{"kex": "diffie-hellman-group14-sha256",\n "port": 22,\n "name": "quay"}': 2048,
    "kex = diffie-hellman-group14-sha1,\nport = 22\n": 2048,
    "KEX_ALGORITHMS=ecdh-sha2-nistp256,\\\n  diffie-hellman-group14-sha1": 2048,
}
TLS = {
    "Groups = x25519:ffdhe2048": 2048,
    "ssl_ecdh_curve X25519:ffdhe3072;": 3072,
    "jdk.tls.namedGroups=secp256r1, ffdhe4096": 4096,
    "priority = NORMAL:-VERS-ALL:+VERS-TLS1.3:+GROUP-FFDHE6144:%SERVER_PRECEDENCE": 6144,
    "supported_groups:\n- FFDHE8192\n": 8192,
}
IKE = {
    "  ike = aes256-sha256-modp2048!": 2048,
    "esp=aes128gcm16-x25519,aes256-modp3072": 3072,
    "proposals = aes256-sha384-modp2048s256": 2048,
    "ike=aes256-sha2_256;dh15": 3072,
    "phase1_dh_group_numbers = [14]": 2048,
    "set pfs group5": 1536,
    "pfs_group: 2": 1024,
    "set dhgrp 16": 4096,
    "dh group 18": 8192,
    "Diffie-Hellman Group: 17": 6144,
    "dhGroup: DHGroup24": 2048,
    'ike_dh_group: "768-bit MODP Group"': 768,
    'dh_group: "1024-bit MODP Group with 160-bit Prime Order Subgroup"': 1024,
    "ipsec_dh_group: 1": 768,
    "crypto ikev1 policy 10\n encryption aes\n group 5\n": 1536,
}


@pytest.mark.parametrize(
    ("text", "bits", "protocol"),
    [
        *((text, bits, "ssh") for text, bits in SSH.items()),
        *((text, bits, None) for text, bits in TLS.items()),
        *((text, bits, "ikev1" if "crypto" in text else None) for text, bits in IKE.items()),
    ],
)
def test_contexts(text: str, bits: int, protocol: str | None) -> None:
    """Each context gives its one group; the protocol where nothing else can be meant."""
    ((name, found, said),) = _found(text)
    assert (found, said) == (bits, protocol)
    assert name.split()[-1] in text


@pytest.mark.parametrize(
    "text",
    [
        "# KexAlgorithms diffie-hellman-group1-sha1",
        "  // kex: diffie-hellman-group1-sha1",
        "KexAlgorithms -diffie-hellman-group1-sha1,diffie-hellman-group14-sha1",
        "Groups = X25519:-ffdhe2048:!ffdhe3072",
        "We no longer use kex diffie-hellman-group1-sha1 anywhere.",
        "kex: the method diffie-hellman-group1-sha1 is forbidden",
        "title: groups of TLS such as ffdhe2048 are fine",
        "esp traffic is protected with modp1024 no more",
        "Ciphers diffie-hellman-group1-sha1",
        "name: modp2048",
        "group 14",
        "group: ffdhe2048-ours",
        "ad_group = 14",
        "dh_group: 19",
        "pfs = 1",
        "pfs: yes",
        "dh_groups: 3 of 14",
        "age_group: 5",
        "crypto ikev2 proposal a\nother\n group 14",
        "KexAlgorithms curve25519-sha256",
        "x" * 5000 + " kex: diffie-hellman-group1-sha1",
    ],
)
def test_contexts_that_leave_doubt(text: str) -> None:
    """Comments, removals, prose, other keys and other groups give nothing."""
    result = read_names(text, "etc/config")
    assert result.empty


def test_what_stands_for_no_one_group() -> None:
    """Negotiated groups, unknown names and a number of two meanings are passed over by name."""
    text = (
        "KexAlgorithms diffie-hellman-group-exchange-sha256,diffie-hellman-group99-sha512\n"
        "GSSAPIKexAlgorithms gss-gex-sha1-\n"
        "Groups = ffdhe1024\n"
        "dh_group: 1\n"
    )
    result = read_names(text, "etc/config")
    assert result.declarations == ()
    assert [(item.line, item.reason) for item in result.passed] == [
        (
            1,
            "'diffie-hellman-group-exchange-sha256': the groups are those of the server's "
            "moduli file",
        ),
        (1, "'diffie-hellman-group99-sha512': no group of that number is published for SSH"),
        (2, "'gss-gex-sha1-': the groups are those of the server's moduli file"),
        (3, "'ffdhe1024': not a group of RFC 7919"),
        (4, "'dh_group 1': modp768 to IKE, modp1024 to SSH; the context does not say"),
    ]


def test_places_and_repetitions() -> None:
    """Each set has the line and column of its text; a repeated name gets its line, and its column
    where that is not enough."""
    text = (
        "KexAlgorithms diffie-hellman-group14-sha256\n"
        "Match User crane\n"
        "  KexAlgorithms curve25519-sha256,diffie-hellman-group14-sha256\n"
        "dh group 14 5\n"
        "a { groups ffdhe2048; } b { groups ffdhe2048; } c { groups ffdhe2048; }\n"
    )
    found = [
        (item.name, item.place.line, item.place.column)
        for item in read_names(text, "etc/config").declarations
    ]
    assert found == [
        ("diffie-hellman-group14-sha256", 1, 15),
        ("diffie-hellman-group14-sha256 (line 3)", 3, 35),
        ("dh group 14", 4, 10),
        ("dh group 5", 4, 13),
        ("ffdhe2048", 5, 12),
        ("ffdhe2048 (line 5)", 5, 36),
        ("ffdhe2048 (line 5, column 60)", 5, 60),
    ]


def test_the_group_supplies_its_values() -> None:
    """Generator and order are those of the registry."""
    (found,) = read_names("Groups = ffdhe2048\n", "etc/config").declarations
    (group,) = (group for group in standard_groups() if group.name == "ffdhe2048")
    assert (found.modulus, found.generator, found.subgroup_order) == (
        group.modulus,
        group.generator,
        group.subgroup_order,
    )


@pytest.mark.parametrize("group", standard_groups(), ids=lambda group: group.name)
def test_every_registry_number_is_known(group: object) -> None:
    """By number in IKE or by name in TLS, each group of the registry is found."""
    from auditor.intake.standard_groups import StandardGroup

    assert isinstance(group, StandardGroup)
    text = f"Groups = {group.name}" if group.ike is None else f"ike dh group: {group.ike}"
    (found,) = read_names(text, "etc/config").declarations
    assert found.modulus == group.modulus


def test_the_number_of_names_is_bounded(monkeypatch: pytest.MonkeyPatch) -> None:
    """Beyond the bound the rest is an error at its place, not silence."""
    monkeypatch.setattr(names, "MAX_NAMES", 2)
    result = read_names("dh group 14 15 16 17\n", "etc/config")
    assert len(result.declarations) == 2
    (error,) = result.errors
    assert (error.line, error.column) == (1, 16)
    assert "more than 2 names" in error.message


PIECES = st.sampled_from(
    [
        *("KexAlgorithms", "kex", "dh", "group", "pfs", "ike", "crypto ikev2 proposal", "Groups"),
        *("diffie-hellman-group14-sha256", "ffdhe2048", "modp2048", "14", "1", "-", "+", "="),
        *(":", ",", "[", "]", "\n", "  ", "- ", "\\", '"', "#", "2048-bit MODP Group"),
        *("{", "}", ";", "'", "/*", "*/", "ikev2 ", " ikesa ", " group ", "connections", "version"),
    ]
)


@given(st.lists(PIECES | st.text(max_size=4), max_size=30).map("".join))
def test_any_text(text: str) -> None:
    """No text raises anything; every set is in a line that holds its text."""
    result = read_names(text, "etc/config")
    lines = text.split("\n")
    called = [item.name for item in result.declarations]
    assert len(set(called)) == len(called)
    for item in result.declarations:
        line = lines[item.place.line - 1]
        assert item.name.partition(" (line")[0].split()[-1] in line[item.place.column - 1 :]
        assert item.name.isprintable()
