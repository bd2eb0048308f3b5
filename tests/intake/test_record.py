"""Records in reports give back the declarations that wrote them, and nothing else."""

import json
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st

from auditor.declaration import EVERYBODY, Declaration, Party, Place, Provenance
from auditor.intake.record import declaration_from

PLACE = Place("links.yaml", 3, 5)

sizes = st.sampled_from([2, 2**8, 2**53, 2**54, 2**64, 2**2048])
naturals = sizes.flatmap(lambda bound: st.integers(min_value=0, max_value=bound))
checks = st.sampled_from(["range", "membership", "cofactor", "certified"])


def _parties(roles: st.SearchStrategy[str], **fixed: Any) -> st.SearchStrategy[Party]:
    return st.builds(
        Party,
        role=roles,
        exponent_bits=st.none() | st.integers(1, 65536),
        exponent_use=st.sampled_from([None, "single", "reused", "static"]),
        peer_check=st.none() | st.lists(checks, unique=True).map(tuple),
    )


_alike = _parties(st.just(EVERYBODY)).filter(lambda party: party != Party(EVERYBODY))
_listed = st.lists(_parties(st.text(min_size=1, max_size=8)), max_size=3).filter(
    lambda parties: [party.role for party in parties] != [EVERYBODY]
)

_provenances = st.builds(
    Provenance,
    method=st.sampled_from(["fips186-2", "fips186-4-probable-primes", "other"]),
    values=st.dictionaries(
        st.sampled_from(["seed", "counter", "hash", "text"]),
        st.integers(0, 4096) | st.text(max_size=12),
    ).map(lambda values: tuple(sorted(values.items()))),
)

declarations = st.builds(
    Declaration,
    name=st.text(max_size=12),
    place=st.just(PLACE),
    modulus=naturals,
    generator=naturals,
    purpose=st.sampled_from([None, "key-agreement", "encryption", "signature"]),
    scheme=st.sampled_from([None, "dsa", "elgamal-raw"]),
    protocol=st.sampled_from([None, "ssh", "custom"]),
    subgroup_order=st.none() | naturals,
    known_factors=st.lists(naturals, max_size=3).map(tuple),
    parties=st.one_of(st.just(()), _alike.map(lambda party: (party,)), _listed.map(tuple)),
    message_bits=st.none() | st.integers(1, 2**16),
    public_values=st.lists(naturals, max_size=3).map(tuple),
    provenance=st.none() | _provenances,
    required_strength=st.none() | st.integers(1, 1024),
    protect_until=st.none() | st.integers(1900, 9999),
)


@given(declarations)
def test_a_record_gives_back_its_declaration(declaration: Declaration) -> None:
    """Through JSON text, the inverse of ``document``."""
    record = json.loads(json.dumps(declaration.document()))
    assert declaration_from(record, PLACE) == declaration
    assert declaration_from(record, PLACE).digest() == declaration.digest()


SOUND = Declaration(
    "a",
    PLACE,
    2**64 + 13,
    2,
    purpose="encryption",
    parties=(Party("server", 4, "single", ("range",)),),
    provenance=Provenance("fips186-2", (("counter", 1), ("seed", "00"))),
).document()

CHANGES: list[tuple[str, Any]] = [
    ("name", 5),
    ("name", None),
    ("modulus", -23),
    ("modulus", 23.0),
    ("modulus", True),
    ("modulus", None),
    ("modulus", 2**64 + 13),
    ("modulus", "0x1000000000000000D"),
    ("modulus", "0x17"),
    ("modulus", "23"),
    ("modulus", {"group": "ffdhe2048"}),
    ("generator", []),
    ("purpose", "decryption"),
    ("protocol", "tls"),
    ("protocol", None),
    ("known_factors", []),
    ("known_factors", 2),
    ("known_factors", ["2"]),
    ("public_values", [-1]),
    ("message_bits", "8"),
    ("message_bits", False),
    ("parties", []),
    ("parties", [{}]),
    ("parties", [{"role": 5}]),
    ("parties", [{"role": "a", "exponent": {"bits": 4.0}}]),
    ("parties", [{"role": "a", "exponent": {"use": "twice"}}]),
    ("parties", [{"role": "a", "exponent": {}}]),
    ("parties", [{"role": "a", "peer_check": ["luck"]}]),
    ("parties", [{"role": "a", "peer_check": None}]),
    ("parties", [{"role": EVERYBODY, "peer_check": []}]),
    ("parties", [{"role": "a", "unknown": 1}]),
    ("exponent", {"bits": 4}),
    ("provenance", {}),
    ("provenance", {"method": 5}),
    ("provenance", {"method": "fips186-2", "counter": None}),
    ("provenance", {"method": "fips186-2", "counter": [1]}),
    ("unknown", 1),
]


@pytest.mark.parametrize(("key", "value"), CHANGES)
def test_other_records_are_refused(key: str, value: Any) -> None:
    """A wrong type, word, sign or spelling, and keys that no declaration writes."""
    assert declaration_from(SOUND, PLACE).document() == SOUND
    with pytest.raises(ValueError, match=r"."):
        declaration_from(SOUND | {key: value}, PLACE)


@pytest.mark.parametrize("key", ["name", "modulus", "generator"])
def test_required_keys_are_required(key: str) -> None:
    """A record without one of them is no declaration's."""
    with pytest.raises(ValueError, match=r"."):
        declaration_from({name: SOUND[name] for name in SOUND if name != key}, PLACE)


_json = st.recursive(
    st.none() | st.booleans() | st.integers() | st.floats(allow_nan=False) | st.text(max_size=8),
    lambda inner: st.lists(inner, max_size=3) | st.dictionaries(st.text(max_size=8), inner),
    max_leaves=8,
)


@given(st.sampled_from(sorted(Declaration.__dataclass_fields__)), _json)
def test_any_record_is_a_declaration_or_an_error(key: str, value: Any) -> None:
    """Nothing but ValueError for what does not come back unchanged."""
    record = SOUND | {key: value}
    try:
        declaration = declaration_from(record, PLACE)
    except ValueError:
        return
    assert json.dumps(declaration.document(), sort_keys=True) == json.dumps(record, sort_keys=True)
