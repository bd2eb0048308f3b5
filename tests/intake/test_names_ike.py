"""The version of IKE in configuration: declared where block or language say it, and only there.

The forms are those of the manual pages: swanctl.conf(5) (``version``: 0 is both, 1, 2),
ipsec.conf(5) of two implementations (``keyexchange``, ``ikev2``), racoon.conf(5), iked.conf(5) and
ipsec.conf(5) of OpenBSD.
"""

import pytest

from auditor.intake.names import read_names


def _found(text: str) -> list[tuple[str, int, str | None]]:
    result = read_names(text, "etc/config")
    assert result.errors == result.passed == ()
    return [
        (item.name.partition(" (line")[0], item.place.line, item.protocol)
        for item in result.declarations
    ]


def _protocols(text: str) -> list[str | None]:
    return [protocol for _, _, protocol in _found(text)]


SWANCTL = """\
connections {{
  gate {{
    {version}
    proposals = aes256-sha256-modp2048
    children {{
      net {{
        esp_proposals = aes256gcm16-modp1024, aes256-sha256-modp768
      }}
    }}
  }}
  other {{
    proposals = aes256-sha256-modp3072
  }}
}}
"""


@pytest.mark.parametrize(
    ("version", "protocol"),
    [("version = 2", "ikev2"), ("version=1", "ikev1"), ("version = 0", None), ("", None)],
)
def test_connections(version: str, protocol: str | None) -> None:
    """A connection says the version for itself and its children, not for the next one."""
    text = SWANCTL.format(version=version)
    assert _protocols(text) == [protocol, protocol, protocol, None]
    late = text.replace(f"    {version}\n", "").replace("  other", f"  o{{\n{version}\n}}\nother")
    assert _protocols(late) == [None] * 4


def test_a_version_of_something_else() -> None:
    """Outside of connections the key says nothing of IKE; said twice it says nothing either."""
    assert _protocols("a { b { version = 2\n proposals = aes-modp2048\n } }") == [None]
    text = SWANCTL.format(version="version = 2\n    version = 1")
    assert _protocols(text) == [None] * 4


@pytest.mark.parametrize(
    ("said", "protocol"),
    [
        ("keyexchange=ikev1", "ikev1"),
        ("keyexchange = ikev2", "ikev2"),
        ("keyexchange=ike", None),
        ("ikev2=insist", "ikev2"),
        ("ikev2=yes", "ikev2"),
        ("ikev2=never", "ikev1"),
        ("ikev2=no", "ikev1"),
        ("ikev2=permit", None),
        ("ikev2=propose", None),
        ("auto=start", None),
    ],
)
def test_sections(said: str, protocol: str | None) -> None:
    """A section says the version for itself, before or behind the proposals."""
    text = (
        f"conn a\n  ike=aes128-sha1-modp1024,3des-md5-modp768\n  {said}\n  esp=aes-modp2048\n"
        "conn b\n  ike=aes256-sha2;dh14\n"
    )
    assert _protocols(text) == [protocol, protocol, protocol, None]


def test_a_section_that_others_inherit() -> None:
    """What it proposes may be used with the version that another section says."""
    assert _protocols("conn %default\n keyexchange=ikev1\n ike=aes-sha1-modp1024\n") == [None]


def test_groups_of_a_router_by_its_key_exchange() -> None:
    """In blocks too; the number 1 means 768 bits as soon as IKE is certain."""
    text = (
        "vpn {\n ike-group G {\n  key-exchange ikev2\n  proposal 1 {\n   dh-group 1\n  }\n }\n}\n"
    )
    assert _found(text) == [("dh-group 1", 5, "ikev2")]
    (passed,) = read_names(text.replace("ikev2", "auto"), "c").passed
    assert passed.line == 5


def test_a_language_of_ikev1_alone() -> None:
    """Its two blocks are known by heading and key together."""
    text = "remote anonymous\n{\n  proposal {\n    dh_group 1;\n  }\n}\n"
    assert _found(text) == [("dh_group 1", 4, "ikev1")]
    assert _protocols("sainfo address 10.0.0.0/8 any { pfs_group modp768; }") == ["ikev1"]
    assert _protocols("remote x { dh_group modp1024; }") == [None]
    assert _protocols("proposal { dh_group modp1024; }") == [None]


FLOW = (
    'ikev2 "group modp8192" active esp from 10.0.0.0/8 to 10.1.0.0/16 peer 192.0.2.4 \\\n'
    "  ikesa enc aes-256 auth hmac-sha2-256 group modp1024 group grp14 \\\n"
    "  childsa enc aes-256 group modp2048-256 esn group ecp256 \\\n"
    "  srcid group psk group\n"
)


def test_flows() -> None:
    """Each group behind the words that begin transforms, on whatever line of the flow."""
    assert _found(FLOW) == [
        ("modp1024", 2, "ikev2"),
        ("grp14", 2, "ikev2"),
        ("modp2048-256", 3, "ikev2"),
    ]
    assert read_names(FLOW.replace("\\\n", ""), "c").declarations[1].place.column > 80
    moduli = [item.modulus.bit_length() for item in read_names(FLOW, "c").declarations]
    assert moduli == [1024, 2048, 2048]


def test_flows_of_the_older_daemon() -> None:
    """Its transforms begin with the phase, and it speaks IKEv1 alone."""
    text = (
        "ike esp from 10.0.0.0/8 to 10.1.0.0/16 peer 192.0.2.4 main auth hmac-sha1 enc 3des "
        "group modp768 quick enc aes group modp1536 psk x\n"
    )
    assert _found(text) == [("modp768", 1, "ikev1"), ("modp1536", 1, "ikev1")]


@pytest.mark.parametrize(
    "text",
    [
        "# ikev2 esp from a to b ikesa group modp1024",
        "ikev2 esp from a to b group modp1024",
        "ikev2 esp from a to b ikesa enc aes # group modp1024",
        "ikev2 uses, as ikesa says, group modp1024",
        "ike in its main mode takes group modp1024-160 first",
        'ikev2 "ikesa group modp1024" esp',
        "ikev2 esp ikesa enc aes\n  group modp1024",
    ],
)
def test_what_is_no_transform_of_a_flow(text: str) -> None:
    """Comments, names, prose, and lines that do not belong to the flow."""
    assert read_names(text, "etc/config").empty
