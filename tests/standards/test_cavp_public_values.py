"""NIST's key pairs and its validity test for static key agreement, and vectors of RFC 5114.

Result codes 1 and 3 of the validity file say that one static public key fails the validation of
section 5.6.2.4, as the file cites it; all other codes leave both public keys valid.
"""

import re
from itertools import groupby

import pytest

from auditor.declaration import Declaration
from auditor.facts import Established
from auditor.intake.standard_groups import find
from auditor.run_values import RunValues
from tests.facts.knowledge import declare, reviewed
from tests.standards.vectors import Block, blocks

QUICK = RunValues("2026-12-01", "quick")
VALIDITY = [f"DH/KASValidityTest_FFCStatic_NOKC_ZZOnly_{role}.fax" for role in ("init", "resp")]


def with_values(group: Block, values: list[int]) -> Declaration:
    """The group of the file with these public values."""
    p, q, g = (group.number(key) for key in ("P", "Q", "G"))
    return declare(p, g, subgroup_order=q, public_values=tuple(values))


def refused(facts: Established) -> set[int]:
    """What SP 800-56A refuses: values out of range or outside the subgroup."""
    return {
        int(str(value), 0)
        for name in ("values_out_of_range", "values_outside_subgroup")
        for value in facts.facts[f"public_values.{name}"].value
    }


def sections(path: str) -> list[tuple[Block, list[Block]]]:
    """Each group of the file with the blocks that follow it."""
    found = []
    for _, members in groupby(blocks(path), key=lambda block: (block.section, block.heading)):
        first, *others = members
        found.append((first, others))
    return found


@pytest.mark.parametrize("path", VALIDITY)
def test_public_keys_are_judged_as_in_the_validity_file(path: str) -> None:
    """Code 1 refuses one side's public key, code 3 the other's, and no other code any."""
    seen = set()
    for group, cases in sections(path):
        keys = [key for key in ("YstatCAVS", "YstatIUT") for _ in cases]
        values = [case.number(key) for key, case in zip(keys, cases * 2, strict=True)]
        bad = refused(reviewed(with_values(group, values), QUICK))
        for case in cases:
            code = int(re.findall(r"\((\d+) -", case.values["Result"])[0])
            seen.add(code)
            assert (case.number("YstatCAVS") in bad) == (code == 1)
            assert (case.number("YstatIUT") in bad) == (code == 3)
        assert len(cases) == 24
    assert {0, 1, 3, 4, 5} <= seen


@pytest.mark.parametrize("edition", ["FIPS_186-2", "FIPS_186-3"])
def test_generated_public_keys_are_accepted(edition: str) -> None:
    """Every key pair of the files: nothing is refused, related or visible."""
    counted = 0
    for group, cases in sections(f"DSA/{edition}/KeyPair.rsp"):
        values = [case.number("Y") for case in cases]
        facts = reviewed(with_values(group, values), QUICK).facts
        names = ("out_of_range", "outside_subgroup", "small_order", "related", "plainly_visible")
        assert {facts[f"public_values.{name}"].value for name in names} == {0}
        assert facts["public_values.count"].value == len(values)
        counted += len(values)
    assert counted == {"FIPS_186-2": 10, "FIPS_186-3": 40}[edition]


def test_exchanges_over_the_groups_of_rfc_5114() -> None:
    """The public values of the vector file lie in the subgroups that the RFC prints."""
    parts = [block.values for block in blocks("DH/RFC5114.txt")]
    groups = [record for record in parts if "P" in record]
    values = [record[key] for record in parts for key in record if key.startswith("Y")]
    for number, record in enumerate(groups):
        declaration = declare(
            int(record["P"], 16),
            int(record["G"], 16),
            subgroup_order=int(record["Q"], 16),
            public_values=tuple(int(y, 16) for y in values[2 * number : 2 * number + 2]),
        )
        facts = reviewed(declaration, QUICK)
        assert refused(facts) == set()
        assert facts.facts["modulus.standard_match"].value == "exact"
        assert facts.absent["provenance.verified"].reason == "undeclared"
    assert len(groups) == 3


def test_groups_of_rfc_3526_have_a_verified_origin() -> None:
    """Each modulus of the vector file follows from pi with the offset that the RFC prints."""
    moduli = [block.number("P") for block in blocks("DH/rfc3526.txt")]
    assert len(moduli) == 6

    for modulus in moduli[:3]:
        facts = reviewed(declare(modulus, 2), QUICK).facts
        group = find(str(facts["modulus.standard_group"].value))
        assert group is not None
        assert group.formula is not None
        assert facts["provenance.verified"].value is True
        assert facts["provenance.offset"].value == group.formula.offset
