"""DSA keys of SSH: the integers of RFC 4253, 6.6, and nothing where the bytes do not hold them."""

import base64
import warnings
from importlib.resources import files
from pathlib import Path

import pytest
from cryptography.hazmat.primitives.asymmetric import dsa
from cryptography.hazmat.primitives.serialization import load_ssh_public_key
from hypothesis import given
from hypothesis import strategies as st

from auditor.intake import ssh_keys
from auditor.intake.readers import Candidate, read_file
from auditor.intake.reading import Reading
from auditor.intake.ssh_keys import read_ssh_keys

VECTORS = Path(str(files("cryptography_vectors"))) / "asymmetric" / "OpenSSH"
P, Q, G, Y = 2**1023 + 1155, 2**159 + 7, 4, 2**1000 + 3


def string(data: bytes) -> bytes:
    """RFC 4251, 5: a length of four bytes, then the bytes."""
    return len(data).to_bytes(4, "big") + data


def mpint(value: int) -> bytes:
    """RFC 4251, 5: two's complement in as few bytes as it takes, none for zero."""
    size = 0 if value == 0 else value.bit_length() // 8 + 1
    return string(value.to_bytes(size, "big", signed=True))


def line(*parts: bytes, kind: str = "ssh-dss", inside: str | None = None) -> str:
    """A key of that kind from the bytes of its parts."""
    data = string((inside or kind).encode()) + b"".join(parts)
    return f"{kind} {base64.b64encode(data).decode()}"


def key(p: int = P, q: int = Q, g: int = G, y: int = Y) -> str:
    """A key with these integers in their order."""
    return line(mpint(p), mpint(q), mpint(g), mpint(y))


def read(text: str) -> Reading:
    """What the reader finds."""
    return read_ssh_keys(text, "keys")


@pytest.mark.parametrize("name", ["dsa-nopsw.key.pub", "dsa-psw.key.pub", "dsa-nopsw.key-cert.pub"])
def test_keys_that_openssh_made(name: str) -> None:
    """The integers are those that the library cryptography finds."""
    data = (VECTORS / name).read_bytes()
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        known = load_ssh_public_key(data)
    assert isinstance(known, dsa.DSAPublicKey)
    numbers = known.public_numbers()
    group = numbers.parameter_numbers

    result = read(data.decode())
    (found,) = result.declarations
    assert (found.modulus, found.subgroup_order, found.generator) == (group.p, group.q, group.g)
    assert found.public_values == (numbers.y,)
    assert (found.purpose, found.scheme, found.protocol) == ("signature", "dsa", "ssh")
    assert result.errors == result.notices == ()


FORMS = {
    "{key}": 1,
    "{key} root@crane\n": 1,
    '\n  from="10.0.0.0/8",no-pty {key} crane': 18 + len("no-pty "),
    "crane,10.0.0.1 {key}": 16,
    "|1|AbCd=|EfGh= {key}\r\n": 16,
    "@revoked crane {key}": 16,
    'ssh_keys: ["{key}"]': 13,
    "'{key} x'": 2,
}


@pytest.mark.parametrize("form", FORMS)
def test_forms(form: str) -> None:
    """Key files, authorized keys with options, known hosts, text in quotes: each by its place."""
    (found,) = read(form.format(key=key())).declarations
    text = form.format(key=key()).split("\n")[found.place.line - 1]
    assert text[found.place.column - 1 :].startswith("ssh-dss AAAA")
    assert (found.modulus, found.subgroup_order, found.generator) == (P, Q, G)
    assert found.name == "ssh-dss 1"


@pytest.mark.parametrize(
    "text",
    [
        "HostKeyAlgorithms +ssh-dss",
        "HostKeyAlgorithms ssh-dss,ssh-rsa",
        "# " + key(),
        "ssh-dss AAAA...",
        key() + "...",
        "x-" + key(),
        "ssh-rsa AAAAB3NzaC1yc2EAAAADAQABAAAAgQ== x",
    ],
)
def test_what_is_no_key(text: str) -> None:
    """Names of algorithms, comments and placeholders."""
    assert read(text).empty


DAMAGED = {
    "it ends too early": line(mpint(P), mpint(Q), mpint(G), mpint(Y)[:-1]),
    "more follows than belongs to it": line(*map(mpint, (P, Q, G, Y)), b"\0"),
    "p is negative": line(mpint(-P), mpint(Q), mpint(G), mpint(Y)),
    "the modulus is 0": key(p=0),
    "the subgroup order is 0": key(q=0),
    "q has more than 65536 bits": key(q=2**70_000),
    "the key inside calls itself 'ssh-rsa'": line(*map(mpint, (P, Q, G, Y)), inside="ssh-rsa"),
    "not base64 text": key()[:-1],
    "found a key of more than": "ssh-dss AAAA" + "A" * ssh_keys.MAX_LENGTH,
}


@pytest.mark.parametrize("message", DAMAGED)
def test_damaged_keys(message: str) -> None:
    """Each is an error at its place, which repeats no value; the next key is read."""
    result = read(f"\nhost {DAMAGED[message]}\n{key()}")
    (error,) = result.errors
    assert (error.line, error.column) == (2, 6)
    assert error.message.startswith(f"ssh-dss: {message}")
    assert len(error.message) < 200
    assert [item.name for item in result.declarations] == ["ssh-dss 2"]


def test_zeros_that_do_not_belong() -> None:
    """The key is read, and a notice says so."""
    result = read(line(string(b"\0\0\7"), mpint(Q), mpint(G), string(b"\0")))
    (found,) = result.declarations
    assert (found.modulus, found.public_values) == (7, (0,))
    assert [notice.message.split()[2] for notice in result.notices] == ["p", "y"]


def test_the_number_of_keys_is_bounded(monkeypatch: pytest.MonkeyPatch) -> None:
    """Beyond the bound the rest is an error at its place."""
    monkeypatch.setattr(ssh_keys, "MAX_KEYS", 2)
    result = read(f"{key()}\n{key()}\n{key()}\n{key()}\n")
    assert len(result.declarations) == 2
    assert [(error.line, error.column) for error in result.errors] == [(3, 1)]


def test_a_file_of_keys_in_a_tree() -> None:
    """It is known by what it holds, whatever its name."""
    found = read_file(Candidate("etc/authorized_keys", None, named=False), key().encode())
    assert isinstance(found, Reading)
    assert [item.scheme for item in found.declarations] == ["dsa"]


NATURAL = st.integers(0, 2**80) | st.integers(2**500, 2**520)


@given(NATURAL.map(lambda n: n + 1), NATURAL.map(lambda n: n + 1), NATURAL, NATURAL)
def test_any_integers(p: int, q: int, g: int, y: int) -> None:
    """What is encoded is read."""
    result = read(key(p, q, g, y))
    (found,) = result.declarations
    assert (found.modulus, found.subgroup_order, found.generator) == (p, q, g)
    assert found.public_values == (y,)
    assert result.errors == result.notices == ()


@given(
    st.binary(max_size=60), st.integers(0, 300), st.sampled_from(["ssh-dss", ssh_keys.CERTIFICATE])
)
def test_any_bytes(data: bytes, at: int, kind: str) -> None:
    """No bytes raise anything: what begins like a key is a set or an error."""
    whole = string(kind.encode()) + b"".join(map(mpint, (P, Q, G, Y)))
    for damaged in (string(kind.encode()) + data, whole[:at] + data + whole[at + len(data) :]):
        text = f"{kind} {base64.b64encode(damaged).decode()} x"
        result = read(text)
        begun = text.split()[1].startswith("AAAA")
        assert len(result.declarations) + len(result.errors) == int(begun and len(damaged) >= 12)


@given(st.text(alphabet='AAAAB3= \n"#-sdh', max_size=80))
def test_any_text(text: str) -> None:
    """No text raises anything."""
    assert read(f"ssh-dss AAAA{text} ssh-dss").candidates == ()
