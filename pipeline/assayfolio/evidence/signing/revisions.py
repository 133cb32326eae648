"""What each incremental update of a signed report changed. One signature, its block and nothing else may be.

The unsigned report ends its own revisions; from there on every revision has to be exactly one signature:

* its bytes begin where the last revision ended, and the signature covers all up to its own end;
* of the objects that were there before, only the catalogue, the form's dictionary, the signature field and
  the store of certificates may be new, and of these only the entries that signing sets;
* other objects carry numbers that were not in use, so nothing that existed can refer to them.

This is stricter than what ISO 32000 allows after a certifying signature, and it also judges the update that a
signer makes himself, which readers of PDF take for his word.
"""

import io
from collections.abc import Iterable
from dataclasses import dataclass
from typing import Any

_SIGN_FLAGS = 3  # signatures exist, append only
_FILLING_ALLOWED = 2


@dataclass(frozen=True, slots=True)
class SignedRevision:
    """One filled signature field, as of its revision; `embedded` is the signing library's view of it."""

    name: str
    embedded: Any
    field: Any
    end: int
    coverage: tuple[str, ...]
    changes: tuple[str, ...]


def signed_revisions(pdf: bytes, unsigned: bytes) -> tuple[tuple[SignedRevision, ...], tuple[str, ...]]:
    """The signatures in the order of their revisions, and what is wrong with the document around them.

    Raises whatever the PDF library does for bytes that it cannot read.
    """
    from pyhanko.pdf_utils.reader import PdfFileReader

    reader, before = PdfFileReader(io.BytesIO(pdf)), PdfFileReader(io.BytesIO(unsigned))
    base = before.xrefs.total_revisions
    total = reader.xrefs.total_revisions
    signatures = sorted(reader.embedded_signatures, key=lambda found: found.signed_revision)
    problems = []
    if reader.xrefs.hybrid_xrefs_present or reader.encrypted:
        problems.append("it is encrypted or has two cross-references at once")
    if total < base or _start(reader, base - 1) != _start(before, base - 1):
        problems.append("its chain of updates does not lead back to the unsigned report")
    if total > base + len(signatures):
        problems.append(f"{total - base - len(signatures)} update(s) carry no signature that is still there")
    end, found = len(unsigned), []
    for place, embedded in enumerate(signatures):
        revision = _revision(pdf, reader, embedded, (base + place, end))
        found.append(revision)
        end = revision.end
    if end < len(pdf):
        problems.append(f"{len(pdf) - end} bytes follow the last signature")
    return tuple(found), tuple(problems)


def _start(reader: Any, revision: int) -> int | None:
    xrefs = reader.xrefs
    return xrefs.get_startxref_for_revision(revision) if 0 <= revision < xrefs.total_revisions else None


def _revision(pdf: bytes, reader: Any, embedded: Any, expected: tuple[int, int]) -> SignedRevision:
    """Judge one signature that should be revision `expected[0]` and follow byte `expected[1]`."""
    number, start = expected
    coverage, end = _coverage(pdf, embedded, start)
    if embedded.signed_revision != number:
        coverage.append("updates that are no signature lie before it")
    elif end and _start(reader, number) != _start_stated(pdf[:end]):
        coverage.append("the file that it covers ends with another cross-reference than its own")
    revision = embedded.signed_revision
    field_name, number_then = embedded.field_name, embedded.sig_field.container_ref
    resolver = reader.get_historical_resolver(revision)
    field = resolver(number_then)
    changes = [] if revision == 0 else _changes(reader, revision, embedded, (start, end or len(pdf)))
    return SignedRevision(field_name, embedded, field, end or len(pdf), tuple(coverage), tuple(changes))


def _start_stated(content: bytes) -> int | None:
    """The place of the cross-reference that the end of a file states."""
    last = content.rstrip(b"\r\n").rsplit(b"startxref", 1)[-1].split()
    return int(last[0]) if len(last) == 2 and last[1] == b"%%EOF" and last[0].isdigit() else None


def _coverage(pdf: bytes, embedded: Any, start: int) -> tuple[list[str], int]:
    """What the signature leaves uncovered, and where what it covers ends (0 if unknown)."""
    reach = [int(end) for end in embedded.byte_range]
    if len(reach) != 4 or reach[0] != 0:
        return ["it does not cover the document from its first byte on"], 0
    gap, after, end = reach[1], reach[2], reach[2] + reach[3]
    if not 0 < gap < after <= end <= len(pdf):
        return ["the bytes that it claims to cover are not there"], 0
    problems = []
    held = b"<" + embedded.pkcs7_content.hex().encode() + b">"
    if pdf[gap:after].lower() != held:
        problems.append("it leaves out more than its own value")
    if gap < start:
        problems.append("its value does not lie in its own update")
    return problems, end


def _changes(reader: Any, revision: int, embedded: Any, span: tuple[int, int]) -> list[str]:
    """What the update `revision`, in bytes `span`, changed beside adding the one signature."""
    old, new = reader.get_historical_resolver(revision - 1), reader.get_historical_resolver(revision)
    touched, problems = new.explicit_refs_in_revision(), []
    if new.refs_freed_in_revision():
        problems.append("it removes objects")
    problems.extend(_trailer_changes(old.trailer_view, new.trailer_view))
    size = int(old.trailer_view["/Size"])
    allowed = _allowed(old, embedded)
    for ref in sorted(touched, key=lambda each: (each.idnum, each.generation)):
        place = reader.xrefs.get_historical_ref(ref, revision)
        if not isinstance(place, int) or not span[0] <= place < span[1]:
            problems.append(f"object {ref.idnum} lies outside the update")
        if (ref.idnum < size or ref.generation) and (ref.idnum, ref.generation) not in allowed:
            problems.append(f"it changes object {ref.idnum}, which is none of a signature's")
    problems.extend(_catalogue_changes(old.root, new.root, embedded))
    problems.extend(_form_changes(old.root, new.root))
    problems.extend(_field_changes(old, new, embedded))
    return problems


def _key(ref: Any) -> tuple[int, int]:
    return int(ref.idnum), int(ref.generation)


def _allowed(old: Any, embedded: Any) -> set[tuple[int, int]]:
    """The objects that signing may replace, by number and generation."""
    from pyhanko.pdf_utils.generic import IndirectObject

    allowed = {_key(old.trailer_view.raw_get("/Root")), _key(embedded.sig_field.container_ref)}
    form = old.root.raw_get("/AcroForm")
    if isinstance(form, IndirectObject):
        allowed.add(_key(form))
    if "/DSS" in old.root:
        allowed |= _store_objects(old, old.root.raw_get("/DSS"))
    return allowed


def _store_objects(resolver: Any, store: Any) -> set[tuple[int, int]]:
    """The dictionary and lists of a security store; not the certificates and lists in it."""
    from pyhanko.pdf_utils.generic import DictionaryObject, IndirectObject

    found = {_key(store)} if isinstance(store, IndirectObject) else set()
    held = resolver.root["/DSS"]
    if isinstance(held, DictionaryObject):
        for key in held:
            entry = held.raw_get(key)
            if isinstance(entry, IndirectObject):
                found.add(_key(entry))
    return found


def _trailer_changes(old: Any, new: Any) -> list[str]:
    problems = [
        f"the trailer's {key} is another"
        for key in ("/Root", "/Info", "/Encrypt")
        if _written(old, key) != _written(new, key)
    ]
    if "/ID" in old and ("/ID" not in new or _bytes(old["/ID"][0]) != _bytes(new["/ID"][0])):
        problems.append("the document's own identifier is another")
    return problems


def _written(holder: Any, key: str) -> bytes | None:
    """The entry `key` as it would be written, references as numbers; None if absent."""
    return _bytes(holder.raw_get(key)) if key in holder else None


def _bytes(value: Any) -> bytes:
    output = io.BytesIO()
    value.write_to_stream(output, None)
    return output.getvalue()


def _differing(old: Any, new: Any) -> set[str]:
    keys: Iterable[str] = sorted({str(key) for key in (*old, *new)})
    return {key for key in keys if _written(old, key) != _written(new, key)}


def _catalogue_changes(old: Any, new: Any, embedded: Any) -> list[str]:
    from pyhanko.pdf_utils.generic import IndirectObject

    allowed = {"/DSS", "/Perms"}
    if not isinstance(old.raw_get("/AcroForm"), IndirectObject):
        allowed.add("/AcroForm")
    problems = [f"it changes {key} of the catalogue" for key in sorted(_differing(old, new) - allowed)]
    certifies = _certified_level(embedded.sig_object)
    if "/Perms" in old:
        if _written(old, "/Perms") != _written(new, "/Perms"):
            problems.append("it changes what the first signature allows")
        if certifies is not None:
            problems.append("it certifies although another signature did")
        return problems
    rights: Any = new.get("/Perms", {})
    value = embedded.sig_field.raw_get("/V")
    named = rights.raw_get("/DocMDP") if "/DocMDP" in rights else None
    if (
        certifies != _FILLING_ALLOWED
        or named is None
        or set(rights) != {"/DocMDP"}
        or _key(named) != _key(value)
    ):
        problems.append("it does not certify the report, as the first signature has to")
    return problems


def _certified_level(signature: Any) -> int | None:
    """Up to what kind of change a signature allows; None for one that certifies nothing."""
    references = signature.get("/Reference", [])
    levels = [ref["/TransformParams"]["/P"] for ref in references if ref["/TransformMethod"] == "/DocMDP"]
    return int(levels[0]) if len(levels) == 1 and len(references) == 1 else None


def _form_changes(old: Any, new: Any) -> list[str]:
    if "/AcroForm" not in new:
        return ["it removes the form"]
    before, after = old["/AcroForm"], new["/AcroForm"]
    problems = [f"it changes {key} of the form" for key in sorted(_differing(before, after) - {"/SigFlags"})]
    if after.get("/SigFlags") != _SIGN_FLAGS:
        problems.append("the form does not say that it may only be added to")
    return problems


def _field_changes(old: Any, new: Any, embedded: Any) -> list[str]:
    ref = embedded.sig_field.container_ref
    before, after = old(ref), new(ref)
    problems = [f"it changes {key} of the field" for key in sorted(_differing(before, after) - {"/V", "/AP"})]
    if "/V" in before:
        problems.append("it fills a field that was signed already")
    if set(after["/AP"]) != {"/N"}:
        problems.append("the field has more than one appearance")
    return problems
