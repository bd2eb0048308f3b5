"""The encoded samples: made from the sample documents, and read back as what they are."""

import importlib.util
from pathlib import Path
from types import ModuleType

import pytest

from auditor.declaration import Declaration
from auditor.intake.tree import InputResult, read_inputs

SAMPLES = Path(__file__).parents[2] / "samples"


@pytest.fixture
def encode() -> ModuleType:
    """The script that writes the samples."""
    spec = importlib.util.spec_from_file_location("encode", SAMPLES / "encode.py")
    assert spec is not None
    assert spec.loader is not None
    module = importlib.util.module_from_spec(spec)
    spec.loader.exec_module(module)
    return module


@pytest.fixture
def result() -> InputResult:
    """The directory as a review reads it."""
    return read_inputs([str(SAMPLES / "encoded")])


def _documents() -> dict[str, Declaration]:
    paths = sorted(map(str, SAMPLES.glob("*.yaml")))
    return {item.name: item for item in read_inputs(paths).declarations}


def test_the_script_writes_the_files(encode: ModuleType) -> None:
    """Byte for byte."""
    for name, text in encode.encoded().items():
        assert (SAMPLES / "encoded" / name).read_text("utf-8") == text


def test_the_numbers_are_those_of_the_documents(result: InputResult) -> None:
    """Each form gives back the numbers of the document that it was made from."""
    documents = _documents()
    found = {item.name: item for item in result.declarations}
    for name, original in {
        "X9.42 DH PARAMETERS 1": "crane enrolment",
        "DH PARAMETERS 1": "tug dispatch",
        "DSA PARAMETERS 1": "lock-gate signing",
        "moduli line 2 (2047)": "tug dispatch",
        "beacon_dh_p": "dredger log",
    }.items():
        assert found[name].modulus == documents[original].modulus
        assert found[name].generator == documents[original].generator
        if name.startswith(("X9.42", "DSA")):
            assert found[name].subgroup_order == documents[original].subgroup_order
    assert {"diffie-hellman-group14-sha256", "modp3072", "modp2048s256"} < found.keys()


def test_every_set_has_its_use(result: InputResult) -> None:
    """The usage file says for each set what its own file does not; only signatures need less."""
    assert result.errors == result.notices == ()
    for item in result.declarations:
        assert item.required_strength == 112
        assert item.purpose is not None
        if item.purpose == "key-agreement":
            assert item.protocol is not None
            assert all(party.exponent_bits and party.exponent_use for party in item.parties)
    assert [item.reason.split(":")[0] for item in result.passed] == [
        "'diffie-hellman-group-exchange-sha256'"
    ]
