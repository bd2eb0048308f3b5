"""Published vectors, read from the package cryptography-vectors at test time.

Its files are those of NIST's Cryptographic Algorithm Validation Program (CAVS 11.0 and 11.1, 2011)
for DSA and finite-field key agreement, and vectors for RFC 3526 and RFC 5114.
"""

import re
from collections.abc import Iterator
from dataclasses import dataclass
from functools import cache
from importlib.resources import files
from typing import NamedTuple

from auditor.claims.origin_recipe import FIPS186_2, PROBABLE, PROVABLE, Recipe
from auditor.claims.origin_replay import Outcome


@dataclass(frozen=True)
class Block:
    """Assignments that stand together, with the headings above them."""

    section: str
    heading: str
    values: dict[str, str]

    def number(self, key: str) -> int:
        """A value in hexadecimal."""
        return int(self.values[key], 16)

    def data(self, key: str) -> bytes:
        """A value as bytes, leading zeros kept."""
        return bytes.fromhex(self.values[key])

    @property
    def hash(self) -> str:
        """The hash function that the heading names, in the words of declarations."""
        return re.findall(r"SHA-\d+", self.heading)[0].lower().replace("-", "")

    @property
    def lengths(self) -> tuple[int, int]:
        """L and N that the heading names."""
        length, width = re.findall(r"[LN]=(\d+)", self.heading)
        return int(length), int(width)


@cache
def blocks(path: str) -> tuple[Block, ...]:
    """The blocks of a file below ``asymmetric`` in the package."""
    text = (files("cryptography_vectors") / "asymmetric" / path).read_text(encoding="utf-8")
    return tuple(_blocks(text.splitlines()))


def _blocks(lines: list[str]) -> Iterator[Block]:
    section = heading = ""
    values: dict[str, str] = {}
    for line in [*(line.strip() for line in lines if not line.startswith("#")), ""]:
        key, _, value = (part.strip() for part in line.partition("="))
        if line.startswith("["):
            heading = line.strip("[]")
            section = section if heading.startswith("mod") else heading
        elif value and key not in values:
            values[key] = value
            continue
        if values:
            yield Block(section, heading, values)
        values = {key: value} if value and not line.startswith("[") else {}


class OriginCase(NamedTuple):
    """Numbers, what they are said to be made from, and where a replay has to end."""

    lengths: tuple[int, int]
    p: int
    q: int
    recipe: Recipe
    expected: Outcome
    name: str


REASONS = {
    "P (No Change)": Outcome.REGENERATED,
    "F (Q doesn't div P-1)": Outcome.NOT_DIVIDING,
    "F (Q doesn't divide (P - 1))": Outcome.NOT_DIVIDING,
    "F (Seed doesn't produce Q)": Outcome.OTHER_Q,
    "F (firstseed doesn't produce P and Q)": Outcome.OTHER_Q,
    "F (P not prime)": Outcome.P_COMPOSITE,
    "F (G modified)": Outcome.REGENERATED,
}
"""The results of the files for p and q. That only g is modified leaves p and q as they were."""


def origin_cases() -> list[OriginCase]:
    """Every case of the files PQGVer and PQGGen that has seeds for p and q."""
    return [
        *(_old_case(block, path) for path in OLD for block in blocks(path)),
        *(
            _new_case(block, path)
            for path in NEW
            for block in blocks(path)
            if {"c", "counter", "pgen_counter"} & block.values.keys() and "H" not in block.values
        ),
    ]


OLD = ("DSA/FIPS_186-2/PQGVer.rsp", "DSA/FIPS_186-2/PQGGen.rsp")
NEW = ("DSA/FIPS_186-3/PQGVer.rsp", "DSA/FIPS_186-3/PQGGen.rsp")


def _old_case(block: Block, path: str) -> OriginCase:
    recipe = Recipe(FIPS186_2, "sha1", (block.data("Seed"),), (int(block.values["c"]),))
    return _case(block, path, (1024, 160), recipe)


def _new_case(block: Block, path: str) -> OriginCase:
    values = block.values
    if "pgen_counter" in values:
        seeds = tuple(block.data(key) for key in ("firstseed", "pseed", "qseed"))
        counters = int(values["pgen_counter"]), int(values["qgen_counter"])
        recipe = Recipe(PROVABLE, block.hash, seeds, counters)
    else:
        seed = block.data("Seed" if "Seed" in values else "domain_parameter_seed")
        counter = int(values["c"] if "c" in values else values["counter"])
        recipe = Recipe(PROBABLE, block.hash, (seed,), (counter,))
    return _case(block, path, block.lengths, recipe)


def _case(block: Block, path: str, lengths: tuple[int, int], recipe: Recipe) -> OriginCase:
    result = block.values.get("Result", "P (No Change)")
    p, q = block.number("P"), block.number("Q")
    name = f"{path.removeprefix('DSA/')} {recipe.method} {lengths} {recipe.hash} {p:x}"[:100]
    return OriginCase(lengths, p, q, recipe, REASONS[result], name)
