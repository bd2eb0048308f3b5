"""Which reader a file is for: by what it holds, and by its name only where that is all there is."""

import re
from dataclasses import dataclass
from pathlib import Path, PurePath

from auditor.intake.candidates import read_candidates
from auditor.intake.document import (
    DocumentResult,
    errors_of,
    is_document,
    parse,
    read_parsed,
)
from auditor.intake.encoded import read_der, read_pem
from auditor.intake.inputs import InputError, decode
from auditor.intake.moduli import is_moduli, read_moduli
from auditor.intake.names import read_names
from auditor.intake.reading import OURS, Passed, Reading, joined
from auditor.intake.ssh_keys import read_ssh_keys
from auditor.intake.usage_file import UsageFile, is_usage_file, read_usage
from auditor.strict_yaml import YamlError

DOCUMENT_SUFFIXES = (".yaml", ".yml", ".json")
DER_SUFFIXES = (".der", ".cer", ".crt", ".p8", ".pk8", ".csr", ".p10")
PROMISING_SUFFIXES = (
    *(".pem", *DER_SUFFIXES, ".key", ".pub", ".cnf", ".dh", ".dhparam", ".dhparams"),
    *(".p7b", ".p7c", ".p7s", ".p12", ".pfx", ".jks", ".keystore"),
)
"""What parameters, keys and certificates are called: such a file is named if it holds nothing."""

PROSE_SUFFIXES = (".md", ".rst", ".adoc", ".html", ".htm", ".tex", ".pod")
"""Where a PEM block is a block, but a name or a number is an example."""

MODULI = "moduli"
"""The name that makes a file one of primes for SSH, whatever it holds."""

NOTHING = (
    "found nothing that is read; expected a declaration document, a usage file, parameters, keys "
    "or certificates in PEM or DER, DSA keys of SSH, a moduli file, or configuration that names a "
    "group"
)

# A key of that name somewhere, and one that is certainly a key of the whole document.
_MENTIONED = re.compile(rb"\bauditor(?:-usage)?[\"']?[ \t]*:")
_AT_TOP = re.compile(rb"^(?:\xef\xbb\xbf)?[\"']?auditor(?:-usage)?[\"']?[ \t]*:", re.MULTILINE)
REPORT_SUFFIX = ".sarif"
"""Findings of some program: they name groups and declare none."""
_OF_OURS = re.compile(
    rb"^(?:\{[ \t\r\n]*)?[\"']?(?:rulebook|report|asking|comparison)[\"']?[ \t]*:[ \t]*1\b",
    re.MULTILINE,
)

_Document = DocumentResult | UsageFile


@dataclass(frozen=True, slots=True)
class Candidate:
    """A file to look at: its path as given, the tree it may refer to, and whether it was named.

    ``top`` is the directory that was given, where it was not.
    """

    path: str
    root: Path | None
    named: bool
    top: str = ""

    @property
    def suffix(self) -> str:
        """The suffix of its name, in lower case."""
        return PurePath(self.path).suffix.lower()

    @property
    def promising(self) -> bool:
        """Whether it is named, or called like a file that is read: then it has to be readable."""
        return self.named or self.suffix in (*DOCUMENT_SUFFIXES, *DER_SUFFIXES, ".pem")

    @property
    def may_be_document(self) -> bool:
        return self.named or self.suffix in DOCUMENT_SUFFIXES


def claimed(candidate: Candidate, data: bytes) -> bool:
    """Whether a file says that it is a document of ours: then what is wrong in it is an error."""
    return candidate.named or (candidate.may_be_document and bool(_AT_TOP.search(data)))


def read_file(candidate: Candidate, data: bytes) -> Reading | _Document:
    """What the file holds; an empty reading for a file of a directory that holds nothing."""
    if candidate.may_be_document and _MENTIONED.search(data):
        document = _document(candidate, data, claims=bool(_AT_TOP.search(data)))
        if document is not None:
            return document
    of_ours = candidate.suffix in DOCUMENT_SUFFIXES and _OF_OURS.search(data)
    if (of_ours or candidate.suffix == REPORT_SUFFIX) and not candidate.named:
        return Reading(passed=(Passed(candidate.path, OURS),))
    reading = _content(candidate, data)
    if not reading.empty:
        return reading
    if candidate.named:
        if candidate.suffix in DOCUMENT_SUFFIXES:
            return _document(candidate, data, claims=True) or reading
        return Reading(errors=(InputError(candidate.path, 1, 1, NOTHING),))
    if candidate.suffix in DOCUMENT_SUFFIXES:
        return Reading(passed=(Passed(candidate.path, "not a declaration document"),))
    if _is_der(candidate, data):
        return Reading(passed=(Passed(candidate.path, "DER of a kind that is not read"),))
    if candidate.suffix in PROMISING_SUFFIXES:
        reason = "called like parameters or keys, and nothing in it is read"
        return Reading(passed=(Passed(candidate.path, reason),))
    return reading


def _document(candidate: Candidate, data: bytes, *, claims: bool) -> _Document | None:
    """The declaration document or usage file in ``data``; None for another text without a claim."""
    text = decode(candidate.path, data)
    if isinstance(text, InputError):
        return DocumentResult((), (text,)) if claims else None
    try:
        loaded = parse(text)
    except YamlError as error:
        return DocumentResult((), errors_of(candidate.path, error.problems)) if claims else None
    if is_usage_file(loaded):
        return read_usage(loaded, candidate.path)
    if is_document(loaded) or claims:
        return read_parsed(loaded, candidate.path, candidate.root)
    return None


def _content(candidate: Candidate, data: bytes) -> Reading:
    """What the file holds, unless that is a document."""
    path = candidate.path
    text = _text_of(data)
    if PurePath(path).name == MODULI or is_moduli(text):
        return read_moduli(text, path)
    if _is_der(candidate, data):
        return read_der(data, path)
    if not _is_text(data):
        return Reading()
    found = [read_pem(text, path)]
    if candidate.named or candidate.suffix not in PROSE_SUFFIXES:
        read = (read_ssh_keys, read_names, read_candidates)
        found += [reader(text, path) for reader in read]
    return joined(found)


def _is_der(candidate: Candidate, data: bytes) -> bool:
    """Whether the file is one DER structure, or is called one and is no text."""
    if candidate.suffix == ".der" and b"-----BEGIN" not in data:
        return True
    named = candidate.named and candidate.suffix not in DOCUMENT_SUFFIXES
    called_so = named or candidate.suffix in DER_SUFFIXES
    return (called_so and not _is_text(data)) or _is_one_sequence(data, short=candidate.named)


def _is_one_sequence(data: bytes, *, short: bool) -> bool:
    """Whether ``data`` is as long as the ASN.1 sequence at its beginning (X.690, 8.1.3).

    Without ``short`` only sequences of 128 bytes or more count: no text begins like them, and
    shorter ones hold no group worth a look.
    """
    if len(data) < 4 or data[0] != 0x30:
        return False
    if data[1] < 0x80:
        return short and data[1] + 2 == len(data)
    header = data[1] - 0x80 + 2
    return 3 <= header <= 6 and header + int.from_bytes(data[2:header], "big") == len(data)


def _is_text(data: bytes) -> bool:
    return b"\0" not in data[:8192]


def _text_of(data: bytes) -> str:
    """The text in whatever encoding that agrees with ASCII."""
    try:
        return data.decode("utf-8-sig")
    except UnicodeDecodeError:
        return data.decode("latin-1")
