"""Declarations to start from are read back as what was found, and say what is open."""

import re
import secrets
from dataclasses import replace
from pathlib import Path

import pytest
import yaml
from click.testing import CliRunner
from hypothesis import given
from hypothesis import strategies as st

from auditor.cli import main
from auditor.declaration import EVERYBODY, Declaration, Party, Place, Provenance
from auditor.declare import of_group, of_sets
from auditor.facts.usage import PROTOCOLS, PURPOSES
from auditor.intake.document import read_document
from auditor.intake.standard_groups import find, standard_groups
from auditor.intake.tree import read_inputs
from auditor.review import Surroundings, review
from auditor.run_values import RunValues

SAMPLES = Path(__file__).parents[1] / "samples"


def read(text: str) -> tuple[Declaration, ...]:
    """The declarations of a document without problems."""
    result = read_document(text, "set.yaml", None)
    assert result.errors == ()
    return result.declarations


def opened(text: str) -> str:
    """The document with every proposed line taken in."""
    return re.sub(r"^    #(?=[a-z_]+: )", "    ", text, flags=re.MULTILINE)


@pytest.mark.parametrize("group", standard_groups(), ids=lambda group: group.name)
def test_a_group_is_declared_completely(group) -> None:  # type: ignore[no-untyped-def]
    """Numbers and order are the group's; exponents reach its strength; all proposals are valid."""
    (declared,) = read(of_group(group))
    (everything,) = read(opened(of_group(group)))
    (party,) = declared.parties

    assert (declared.modulus, declared.generator) == (group.modulus, group.generator)
    assert declared.subgroup_order == group.subgroup_order
    assert declared.purpose == "key-agreement"
    assert (party.exponent_bits or 0) <= group.subgroup_order.bit_length()
    assert everything.required_strength is not None
    assert everything.provenance is not None
    assert everything.protocol is not None


@pytest.mark.parametrize("name", ["ffdhe2048", "modp2048", "rfc5114-2048-256"])
def test_what_is_proposed_for_a_group_meets_no_objection(name: str, tmp_path: Path) -> None:
    """Reviewed as it stands."""
    group = find(name)
    assert group is not None
    path = tmp_path / "set.yaml"
    path.write_text(of_group(group), encoding="utf-8")
    record = review([str(path)], RunValues("2026-12-01", "quick"), Surroundings(secrets.randbelow))

    assert [item["position"] for item in record["parameter_sets"]] == ["no objection"]


def test_what_the_samples_hold_is_read_back() -> None:
    """Documents, PEM and a moduli file: the same sets in the same order, names made unique."""
    found = read_inputs([str(SAMPLES)]).declarations
    again = read(of_sets(found))

    assert len(found) > 20
    assert [item.digest() for item in again] == [item.digest() for item in found]
    assert len({item.name for item in again}) == len(again)


def test_equal_names_are_told_apart() -> None:
    """Two files may use the same name; one document may not."""
    declared = Declaration("set", Place("p", 1), modulus=23, generator=2)
    names = [item.name for item in read(of_sets([declared, declared, declared]))]

    assert names == ["set", "set (2)", "set (3)"]


NAMES = st.text(
    st.characters(
        exclude_categories=["Cc", "Cs", "Zl", "Zp"],
        exclude_characters="\u202a\u202b\u202c\u202d\u202e\u2066\u2067\u2068\u2069",
    ),
    min_size=1,
    max_size=60,
).filter(lambda text: not text.isspace())
NUMBERS = st.integers(1, 2**4000)
PARTIES = st.builds(
    Party,
    st.just(EVERYBODY),
    st.none() | st.integers(1, 4096),
    st.none() | st.sampled_from(["single", "reused", "static"]),
    st.none() | st.lists(st.sampled_from(["range", "membership"]), unique=True).map(tuple),
).filter(lambda party: party != Party(EVERYBODY))


@given(
    st.builds(
        Declaration,
        name=NAMES
        | st.sampled_from(["yes", "null", "1e5", "0x17", "- a", "a: b", "a #b", "~", "'"]),
        place=st.just(Place("some\nwhere", 1)),
        modulus=NUMBERS,
        generator=NUMBERS,
        purpose=st.none() | st.sampled_from(PURPOSES),
        protocol=st.none() | st.sampled_from(PROTOCOLS),
        subgroup_order=st.none() | NUMBERS,
        known_factors=st.lists(NUMBERS.filter(lambda n: n > 1), max_size=3).map(tuple),
        parties=st.just(()) | PARTIES.map(lambda party: (party,)),
        public_values=st.lists(NUMBERS, max_size=3).map(tuple),
        provenance=st.none() | NAMES.map(lambda text: Provenance("other", (("text", text),))),
        required_strength=st.none() | st.integers(1, 256),
        protect_until=st.none() | st.integers(2000, 2100),
    )
)
def test_any_declaration_is_read_back(declared: Declaration) -> None:
    """Whatever its name: what is written is what is read, but for the place."""
    assert read(of_sets([declared])) == (replace(declared, place=Place("set.yaml", 1)),)


def test_several_parties_are_written_out() -> None:
    """Each keeps its role; no exponent is proposed beside them."""
    parties = (Party("server", 256, "static", ("range",)), Party("client: 2", None, "single", ()))
    declared = Declaration("set", Place("p", 1), modulus=23, generator=2, parties=parties)
    text = of_sets([declared])

    assert read(text)[0].parties == parties
    assert "#exponent" not in text


def test_a_signature_is_asked_for_its_scheme_and_no_check() -> None:
    """What makes no sense for the purpose is not proposed."""
    declared = Declaration("set", Place("p", 1), modulus=23, generator=2, purpose="signature")
    text = of_sets([declared])

    assert "#scheme: " in text
    assert "peer_check" not in text


def run(*arguments: str) -> tuple[int, str, str]:
    """Exit status, standard output and standard error of a command."""
    result = CliRunner().invoke(main, ["declare", *arguments], standalone_mode=False)
    if result.exception is not None:
        raise result.exception
    return result.return_value or 0, result.stdout, result.stderr


def test_the_command_takes_a_group_by_any_of_its_names() -> None:
    """By the registry's name, and by an alias."""
    status, text, _ = run("group14")
    assert status == 0
    assert yaml.safe_load(text)["parameter_sets"][0]["modulus"] == {"group": "modp2048"}


def test_the_command_takes_files_and_says_what_is_wrong_with_them(tmp_path: Path) -> None:
    """The sound sets are written; the errors go to standard error, and the status is 2."""
    sound = (SAMPLES / "encoded" / "moduli").read_text(encoding="utf-8")
    path = tmp_path / "moduli"
    path.write_text(sound + "20240101000000 2 6 100 2047 2 nothex\n", encoding="utf-8")
    status, text, errors = run(str(path))

    assert status == 2
    assert len(read(text)) == 1
    assert f"{path}:" in errors
    assert "hexadecimal" in errors


def test_a_word_that_is_neither_is_refused_with_a_suggestion() -> None:
    """Neither a file nor a group: what may have been meant."""
    result = CliRunner().invoke(main, ["declare", "ffdhe2084"])

    assert result.exit_code == 2
    assert "ffdhe2048" in result.stderr
