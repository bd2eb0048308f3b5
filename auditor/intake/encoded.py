"""Finite-field groups in PEM and DER: parameters, public keys, certificates, requests, key files.

Labels and object identifiers say what a structure is; integers are never counted to guess it where
either is there. Any values are read, however bad; a set is refused only where a declaration could
not hold it. Private values are not decoded.
"""

from collections import Counter
from collections.abc import Iterator

from auditor.declaration import Declaration, Place
from auditor.intake.inputs import InputError
from auditor.intake.pem import Block, PemError, Placeholder, StrayEnd, blocks
from auditor.intake.reading import Notice, Passed, Reading

PARAMETERS = "DH PARAMETERS", "X9.42 DH PARAMETERS", "DSA PARAMETERS"
KEYS = "PUBLIC KEY", "PRIVATE KEY", "DSA PRIVATE KEY"
SIGNED = "CERTIFICATE", "CERTIFICATE REQUEST", "NEW CERTIFICATE REQUEST"
LABELS = (*PARAMETERS, *KEYS, *SIGNED)
"""RFC 7468, 4 for the keys and certificates; the labels of bare parameters are a convention."""

MAX_BLOCKS = 10_000


def read_pem(text: str, path: str) -> Reading:
    """The groups in every PEM block of ``text``; a bad block is an error on its BEGIN line.

    A set is named by its label and its number among the blocks of that label. Blocks of other
    labels or with other kinds of keys are passed over, equal reasons once.
    """
    reader = _Reader(path)
    numbers: Counter[str] = Counter()
    for count, block in enumerate(blocks(text)):
        place = Place(path, block.line, block.column)
        if count == MAX_BLOCKS:
            reader.error(place, f"found more than {MAX_BLOCKS} PEM blocks; the rest is not read")
            break
        if isinstance(block, StrayEnd):
            if block.label in LABELS:
                reader.error(place, f"found the END line of {block.label} without a BEGIN line")
            continue
        numbers[block.label] += 1
        reader.block(block, f"{block.label} {numbers[block.label]}", place)
    return reader.reading()


def read_der(data: bytes, path: str) -> Reading:
    """The group in a DER file that is one structure; empty for a structure of another kind.

    Without a label the structure is known by its shape; where that leaves two answers, it is an
    error.
    """
    from auditor.intake import encoded_sets as sets

    reader = _Reader(path)
    place = Place(path, 1)
    try:
        label = sets.label_of(data)
        if label is not None:
            reader.structure(label, data, label, place)
    except sets.OtherKind as other:
        reader.passed(place, f"DER: {other}")
    except sets.EncodingError as error:
        reader.error(place, f"DER: {error}")
    return reader.reading()


class _Reader:
    """What one file holds so far."""

    def __init__(self, path: str) -> None:
        self._path = path
        self._declarations: list[Declaration] = []
        self._errors: list[InputError] = []
        self._notices: list[Notice] = []
        self._passed: dict[str, list[int]] = {}

    def block(self, block: Block, name: str, place: Place) -> None:
        """Read one PEM block, or say why not."""
        if block.label == "ENCRYPTED PRIVATE KEY" or (block.label in LABELS and block.encrypted):
            self.passed(place, f"{block.label}: encrypted, which is not opened")
            return
        if block.label not in LABELS:
            self.passed(place, f"{block.label}: not a kind of block that is read")
            return
        try:
            data = block.data()
        except Placeholder as error:
            self.passed(place, f"{block.label}: {error}")
        except PemError as error:
            self.error(place, f"{block.label}: {error}")
        else:
            self.structure(block.label, data, name, place)

    def structure(self, label: str, data: bytes, name: str, place: Place) -> None:
        """Read one structure of the kind that ``label`` names, or say why not."""
        from auditor.intake import encoded_sets as sets

        try:
            found = sets.encoded_set(label, data)
        except sets.OtherKind as other:
            self.passed(place, f"{label}: {other}")
        except sets.EncodingError as error:
            self.error(place, f"{label}: {error}")
        else:
            self._declarations.append(found.declaration(name, place))
            self._notices += [
                Notice(self._path, place.line, f"{name}: {remark}") for remark in found.remarks
            ]

    def error(self, place: Place, message: str) -> None:
        self._errors.append(InputError(self._path, place.line, place.column, message))

    def passed(self, place: Place, reason: str) -> None:
        self._passed.setdefault(reason, []).append(place.line)

    def reading(self) -> Reading:
        return Reading(
            declarations=tuple(self._declarations),
            errors=tuple(self._errors),
            passed=tuple(self._one_for_each_reason()),
            notices=tuple(self._notices),
        )

    def _one_for_each_reason(self) -> Iterator[Passed]:
        for reason, lines in self._passed.items():
            more = f" (and {len(lines) - 1} more in this file)" if len(lines) > 1 else ""
            yield Passed(self._path, reason + more, lines[0])
