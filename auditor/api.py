"""The public surface for programs: two functions, and the types that they take and return.

Everything else may change between versions without notice; the report record has a version of its
own (``report.schema.json``).
"""

from auditor.claims.collection import Claims
from auditor.inquiry.answers import Answers, Cores
from auditor.inquiry.unit_groups import ElementOrder, Structure, isomorphic, order_of, structure
from auditor.review import Surroundings, review
from auditor.run_values import RunValues
from auditor.search.curves import BuiltIn
from auditor.search.gmp_ecm import GmpEcm
from auditor.search.gmp_ecm import installed as installed_gmp_ecm
from auditor.structure import PartlyFactoredGroup, UnitGroup, UnsplitGroup
from auditor.verify import Verification, verify

__all__ = [
    "Answers",
    "BuiltIn",
    "Claims",
    "Cores",
    "ElementOrder",
    "GmpEcm",
    "PartlyFactoredGroup",
    "RunValues",
    "Structure",
    "Surroundings",
    "UnitGroup",
    "UnsplitGroup",
    "Verification",
    "installed_gmp_ecm",
    "isomorphic",
    "order_of",
    "review",
    "structure",
    "verify",
]
