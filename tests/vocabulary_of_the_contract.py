"""The vocabulary of rules as the contract lists it: names, kinds and the values of texts."""

from auditor.facts.base import FactKind, FactType

ROUTES = (
    "number_field_sieve",
    "special_number_field_sieve",
    "hidden_form",
    "square_root",
    "pohlig_hellman",
    "short_exponent",
    "smooth_part_then_short_exponent",
    "confinement",
    "raw_message",
    "composite_modulus",
    "prime_power",
)
_TEXTS = {
    "usage.purpose": ("key-agreement", "encryption", "signature"),
    "usage.scheme": (
        "elgamal-raw", "elgamal-encoded", "elgamal-hashed", "elgamal", "dsa", "schnorr",
    ),
    "usage.protocol": (
        "tls1.0", "tls1.1", "tls1.2", "tls1.3", "ssh", "ikev1", "ikev2", "cms", "openpgp",
        "custom",
    ),
    "modulus.nature": ("prime", "prime power", "power of two", "composite"),
    "modulus.standard_group": (),
    "modulus.standard_match": ("exact", "modulus only", "none"),
    "provenance.method": (
        "fips186-4-probable-primes", "fips186-4-provable-primes", "fips186-2",
        "pi-formula", "e-formula", "other",
    ),
    "provenance.disagreement": (
        "lengths not of this method", "counter beyond its limit", "seed too short",
        "hash shorter than q", "q does not divide p - 1", "seed gives another q", "q not prime",
        "p not prime", "counter gives another p", "an earlier counter gives a prime",
        "no prime within the limit", "seed counts past its length", "digits give another modulus",
    ),
    "strength.shortfalls_seen": (),
    "scheme.dsa_sizes": ("1024/160", "2048/224", "2048/256", "3072/256", "other"),
}  # fmt: skip
_BY_KIND: dict[FactKind, str] = {
    "bool": """
        usage.peer_range usage.peer_membership usage.peer_cofactor usage.exponent_reused
        usage.ephemeral_reused usage.protection_stated usage.exponent_widths_declared
        modulus.safe_prime modulus.special_form_seen group.cyclic group.factored
        generator.unit generator.reduced generator.trivial generator.order_prime
        generator.order_even
        generator.generates_group generator.order_is_declared generator.canonical
        subgroup.declared subgroup.order_prime subgroup.divides_group
        subgroup.cofactor_agrees
        provenance.verified provenance.regenerated provenance.offset_least
        scheme.forgery_seen scheme.message_symbol_leaks scheme.distinguisher_seen
        strength.sufficient""",
    "int": """
        usage.narrowest_exponent_at_most usage.widest_exponent_at_least
        usage.message_length usage.protect_until run.year modulus.length
        modulus.occurrences modulus.smallest_factor_length_at_most
        group.unfactored_length_at_most group.searched_digits_at_least
        generator.order_length generator.largest_prime_length subgroup.order_length
        public_values.count public_values.out_of_range public_values.outside_subgroup
        public_values.small_order public_values.related public_values.plainly_visible
        provenance.offset strength.required_bits strength.standard_bits""",
    "real": """
        group.order_bits group.exponent_bits
        generator.order_bits generator.index_bits subgroup.cofactor_bits
        exponent.public_leak_bits_at_least exponent.confinement_leak_bits_at_least
        scheme.forgery_bits_at_most
        strength.work_bits_at_most strength.work_bits strength.designer_bits_at_most"""
    + " ".join(f" strength.{route}_bits_at_most" for route in ROUTES),
    "exhibit": """
        usage.exponent_width group.missed_factor_risk group.missed_factor_window
        group.cycles subgroup.small_factors_seen public_values.values_out_of_range
        public_values.values_outside_subgroup public_values.values_of_small_order
        public_values.values_related public_values.values_plainly_visible""",
}

VOCABULARY: dict[str, FactType] = {
    name: FactType(name, kind, f"meaning of {name}", _TEXTS.get(name, ()))
    for kind, names in ((*_BY_KIND.items(), ("text", " ".join(_TEXTS))))
    for name in names.split()
}
