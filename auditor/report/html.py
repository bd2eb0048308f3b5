"""The report as one self-contained HTML file that opens offline and prints well.

No script, no request: the content policy of the page refuses both. All text passes through the
templates' escaping, which is always on; a name that a template asks for and does not find is an
error and never an empty place.
"""

from auditor.report import words
from auditor.report.claim_words import is_small_prime, sentence
from auditor.report.common_view import common
from auditor.report.exposure_view import exposure_table
from auditor.report.moduli_view import moduli, moduli_picture
from auditor.report.order_view import GroupOrders
from auditor.report.pictures import PART_MEANING, routes_picture
from auditor.report.shared_findings import by_sheet, shared_findings
from auditor.report.templates import environment
from auditor.report.text import read_integer
from auditor.report.view import Record, View, view

MOST_SHEETS = 250
"""Sheets written out, the worst first; the decision sheet has all sets, the JSON report all."""

MOST_ENTRIES = 1_000
"""Entries written out of any other list."""


def render(record: Record | View) -> str:
    """The whole report as an HTML document."""
    report = view(record)
    claims = report.record["claims"]
    orders = GroupOrders.read(claims)
    shown = report.sheets[:MOST_SHEETS]
    distinct = moduli(report.sheets)
    shared = shared_findings(report.sheets)
    keys = sorted(claims) if len(claims) <= MOST_ENTRIES else report.claims_behind(shown)
    return (
        environment()
        .get_template("report.html.j2")
        .render(
            report=report,
            words=words,
            most_entries=MOST_ENTRIES,
            shown=shown,
            shared=shared,
            shared_by_sheet=by_sheet(shared),
            moduli=distinct,
            common=common(report.record["overview"]),
            moduli_picture=moduli_picture(distinct),
            claims=[(key, claims[key]) for key in keys if not is_small_prime(claims[key])],
            small_primes=_small_primes({key: claims[key] for key in keys}),
            claims_left_out=len(claims) - len(keys),
            sentence=sentence,
            part_meaning=PART_MEANING,
            exposure_table=lambda sheet: exposure_table(sheet.record["exposure"]),
            strip=lambda sheet: orders.strip(sheet.record["declaration"]),
            routes_picture=lambda sheet: routes_picture(
                sheet.record["routes"], sheet.strength.required
            ),
        )
    )


def _small_primes(claims: Record) -> list[tuple[str, int]]:
    """Id and number of every claim that a number below 2^64 is prime, by number."""
    found = [
        (key, read_integer(claim["statement"]["n"]))
        for key, claim in claims.items()
        if is_small_prime(claim)
    ]
    return sorted(found, key=lambda item: item[1])
