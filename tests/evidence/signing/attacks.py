"""Attacks on a report with three signatures: what is done, and which check finds it."""

import io
import json
from collections.abc import Callable
from contextlib import contextmanager
from dataclasses import dataclass, replace
from datetime import timedelta
from unittest.mock import patch

import pikepdf
from fontTools.ttLib import TTFont
from pyhanko.pdf_utils import generic
from pyhanko.pdf_utils.generic import pdf_name
from pyhanko.pdf_utils.incremental_writer import IncrementalPdfFileWriter
from pyhanko.pdf_utils.reader import PdfFileReader
from pyhanko.pdf_utils.writer import copy_into_new_writer

from assayfolio.canonical import canonical_bytes
from assayfolio.evidence.signing import appearance, pades
from assayfolio.evidence.signing.authority import Revocation
from assayfolio.evidence.signing.block import SubsetFont
from assayfolio.evidence.signing.identities import certificate_facts
from assayfolio.evidence.signing.pades import sign
from assayfolio.evidence.signing.records import record_bytes
from evidence.signing.office import (
    PEOPLE,
    SIGNED,
    OnFile,
    certified,
    office,
    open_office,
    signed_by,
    signed_in_turn,
    signed_report,
    statement,
    unsigned_report,
)


@dataclass(frozen=True)
class Attack:
    """What was done, and the check that finds it with a part of its words."""

    name: str
    make: Callable[[], OnFile]
    check: str
    words: str


def updated(change: Callable[[IncrementalPdfFileWriter], None], pdf: bytes | None = None) -> bytes:
    """The signed report with an incremental update of its objects."""
    writer = IncrementalPdfFileWriter(io.BytesIO(pdf or signed_report().report.pdf))
    change(writer)
    writer.add_object(generic.NullObject())  # so that the count of objects grows, as readers expect
    output = io.BytesIO()
    writer.write(output)
    return output.getvalue()


def by_update(change: Callable[[IncrementalPdfFileWriter], None]) -> Callable[[], OnFile]:
    return lambda: signed_report().with_pdf(updated(change))


def by_bytes(change: Callable[[bytes], bytes]) -> Callable[[], OnFile]:
    return lambda: signed_report().with_pdf(change(signed_report().report.pdf))


def flipped(place: int) -> Callable[[bytes], bytes]:
    return lambda pdf: pdf[:place] + bytes([pdf[place] ^ 1]) + pdf[place + 1 :]


def flipped_in_update(pdf: bytes) -> bytes:
    """A bit in the middle of the first stream that the first signer added."""
    return flipped(pdf.index(b"stream", len(unsigned_report())) + 60)(pdf)


def rewritten(change: Callable[[pikepdf.Pdf], None]) -> Callable[[bytes], bytes]:
    def save(pdf: bytes) -> bytes:
        with pikepdf.open(io.BytesIO(pdf)) as opened:
            change(opened)
            output = io.BytesIO()
            opened.save(output)
        return output.getvalue()

    return save


# --- by incremental updates


def page(writer, number: int):
    return writer.root["/Pages"]["/Kids"][number]


def remove_page(writer) -> None:
    pages = writer.root["/Pages"]
    del pages["/Kids"][3]
    pages[pdf_name("/Count")] = generic.NumberObject(len(pages["/Kids"]))
    writer.update_container(pages)


def empty_page(writer) -> None:
    leaf = page(writer, 1)
    leaf[pdf_name("/Contents")] = writer.add_object(generic.StreamObject(stream_data=b"BT ET"))
    writer.update_container(leaf)


def add_note(writer) -> None:
    leaf = page(writer, 1)
    box = generic.ArrayObject(generic.NumberObject(end) for end in (50, 50, 200, 100))
    note = generic.DictionaryObject(
        {
            pdf_name("/Type"): pdf_name("/Annot"),
            pdf_name("/Subtype"): pdf_name("/FreeText"),
            pdf_name("/Rect"): box,
            pdf_name("/Contents"): generic.TextStringObject("equivalent after all"),
        }
    )
    held = list(leaf["/Annots"]) if "/Annots" in leaf else []
    leaf[pdf_name("/Annots")] = generic.ArrayObject([*held, writer.add_object(note)])
    writer.update_container(leaf)


def replace_attachment(writer) -> None:
    held = writer.root["/AF"][0]
    held["/EF"][pdf_name("/F")] = writer.add_object(generic.StreamObject(stream_data=b"level,value\nA,9.9\n"))
    writer.update_container(held["/EF"])
    writer.update_container(held)


def change_title(writer) -> None:
    writer.trailer["/Info"][pdf_name("/Title")] = generic.TextStringObject("Another report")
    writer.mark_update(writer.trailer.raw_get("/Info").reference)


def field_of(writer, name: str):
    fields = writer.root["/AcroForm"]["/Fields"]
    return next(each.get_object() for each in fields if each.get_object()["/T"] == name)


def blank_block(writer) -> None:
    field = field_of(writer, "author")
    form = generic.StreamObject(stream_data=b"")
    form.update({pdf_name("/Subtype"): pdf_name("/Form"), pdf_name("/BBox"): field["/Rect"]})
    field["/AP"][pdf_name("/N")] = writer.add_object(form)
    writer.update_container(field)


def move_block(writer) -> None:
    field = field_of(writer, "author")
    field[pdf_name("/Rect")] = generic.ArrayObject(generic.NumberObject(end) for end in (0, 0, 1, 1))
    writer.update_container(field)


def remove_value(writer) -> None:
    field = field_of(writer, "approver")
    del field["/V"]
    writer.update_container(field)


def allow_more(writer) -> None:
    del writer.root["/Perms"]
    writer.update_root()


def nothing(writer) -> None:
    writer.mark_update(writer.root_ref)


def whole_document_after(pdf: bytes) -> bytes:
    """A complete other document behind the signed one, whose cross-reference forgets the signed one."""
    with pikepdf.open(io.BytesIO(unsigned_report("single values"))) as other:
        output = io.BytesIO()
        other.save(output, object_stream_mode=pikepdf.ObjectStreamMode.disable)
    body, offset = output.getvalue(), len(pdf)
    table = body.rindex(b"xref\n0 ")
    lines = body[table:].split(b"\n")
    moved = [
        b"%010d%s" % (int(line[:10]) + offset, line[10:]) if line.endswith(b" n ") else line for line in lines
    ]
    tail = b"\n".join(moved)
    start = tail.rindex(b"startxref")
    return pdf + body[:table] + tail[:start] + b"startxref\n%d\n%%%%EOF\n" % (table + offset)


# --- by one of the signers himself


@contextmanager
def own_writer(change):
    """Inside, whoever signs also makes `change` in the same update."""
    honest = pades._writer

    def dishonest(pdf: bytes):
        writer = honest(pdf)
        change(writer)
        return writer

    with patch.object(pades, "_writer", dishonest):
        yield


def last_signed(pdf: bytes, **changes) -> OnFile:
    """The last of the three signatures made anew on `pdf`, with a record that fits it."""
    made = sign(pdf, unsigned_report(), statement("approver", **changes), office().people["approver"])
    return with_last(made)


def with_last(made) -> OnFile:
    held = signed_report()
    records = held.report.records | {made.record.name: record_bytes(made.record)}
    return held.with_pdf(made.pdf).with_records(records)


def while_signing(change) -> Callable[[], OnFile]:
    def make() -> OnFile:
        with own_writer(change):
            return last_signed(signed_report().kept[1])

    return make


def first_does_not_certify() -> OnFile:
    honest = pades._setup
    with patch.object(pades, "_setup", lambda stated, room, first: honest(stated, room, False)):
        return signed_in_turn("author")


def second_certifies_too() -> OnFile:
    honest = pades._setup
    with patch.object(pades, "_setup", lambda stated, room, first: honest(stated, room, True)):
        return signed_in_turn("author", "reviewer")


def prints_another(**changes) -> Callable[[], OnFile]:
    """The signature is right, the block that its maker printed says something else."""

    def make() -> OnFile:
        other = statement("approver", **changes)
        honest = pades.stamp_style
        with patch.object(pades, "stamp_style", lambda stated: honest(other)):
            return last_signed(signed_report().kept[1])

    return make


def font_lies() -> OnFile:
    """The block's character map says one name, the outlines of its letters spell another."""
    honest = appearance.subset_font

    def swapped(characters: str) -> SubsetFont:
        font = honest(characters)
        with TTFont(io.BytesIO(font.program), recalcTimestamp=False) as opened:
            order, glyphs = opened.getGlyphOrder(), opened["glyf"]
            first, second = order[font.glyph_of["C"]], order[font.glyph_of["F"]]
            glyphs[first], glyphs[second] = glyphs[second], glyphs[first]
            output = io.BytesIO()
            opened.save(output)
        return replace(font, program=output.getvalue())

    with patch.object(appearance, "subset_font", swapped):
        return last_signed(signed_report().kept[1])


def signs_earlier() -> OnFile:
    return last_signed(signed_report().kept[1], time=SIGNED - timedelta(days=3))


def signs_in_the_future() -> OnFile:
    return last_signed(signed_report().kept[1], time=SIGNED + timedelta(days=200))


def other_folder() -> OnFile:
    return last_signed(signed_report().kept[1], seal="0f" * 32)


# --- by other certificates


def last_signed_with(identity) -> OnFile:
    pdf = signed_report().kept[1]
    return with_last(sign(pdf, unsigned_report(), statement("approver"), identity))


def same_name_elsewhere() -> OnFile:
    stranger = open_office()
    return last_signed_with(stranger.people["approver"])


def minted_by_the_authority() -> OnFile:
    name, account, _ = PEOPLE["approver"]
    return last_signed_with(certified(office().authority, name, account))


def forged_from_the_ground() -> OnFile:
    stranger = open_office()
    pdf, records = unsigned_report(), {}
    for role in PEOPLE:
        made = signed_by(pdf, role, by=stranger)
        pdf, records = made.pdf, records | {made.record.name: record_bytes(made.record)}
    return signed_report().with_pdf(pdf).with_records(records)


def claims_a_colleague() -> OnFile:
    """The reviewer signs as approver under the approver's name, with his own key."""
    pdf, own = signed_report().kept[1], office().people["reviewer"]
    claimed = replace(certificate_facts(own.certificate), person=PEOPLE["approver"][0])
    with patch.object(pades, "certificate_facts", lambda der: claimed):
        return with_last(sign(pdf, unsigned_report(), statement("approver"), own))


def runs_out_before() -> OnFile:
    """An enrolled certificate that had run out, used by turning off the check before signing."""
    name, account, _ = PEOPLE["approver"]
    old = certified(office().authority, name, account, days=30)
    facts = certificate_facts(old.certificate)
    longer = replace(facts, not_after=SIGNED + timedelta(days=900))
    with patch.object(pades, "certificate_facts", lambda der: longer):
        made = last_signed_with(old)
    return replace(made, trust=replace(made.trust, enrolled=office().enrolled | {facts.fingerprint: name}))


def revoked(hours: float, **trust) -> OnFile:
    """The approver's certificate revoked this long after he signed."""
    held = signed_report()
    serial = certificate_facts(office().people["approver"].certificate).serial
    when = statement("approver").time + timedelta(hours=hours)
    newer = office().list_of(2, Revocation(serial, when, "keyCompromise"))
    lists = (*held.trust.revocation_lists, newer)
    return replace(held, trust=replace(held.trust, revocation_lists=lists, **trust))


def revoked_before() -> OnFile:
    return revoked(-48)


def witnessed_too_late() -> OnFile:
    late = statement("approver").time + timedelta(hours=2)
    return revoked(1, proven_by={3: late})


# --- by cutting and pasting


def value_of(pdf: bytes) -> tuple[int, int]:
    """Where the last signature's value stands: the places of its angle brackets."""
    start = pdf.rindex(b"/Contents <") + len(b"/Contents ")
    return start, pdf.index(b">", start)


def pasted_value(pdf: bytes) -> bytes:
    """The last signature's value replaced by the same person's on another day."""
    other = last_signed(signed_report().kept[1], time=SIGNED + timedelta(days=1)).report.pdf
    (start, end), (other_start, other_end) = value_of(pdf), value_of(other)
    return pdf[:start] + other[other_start:other_end] + pdf[end:]


def wrong_digit(pdf: bytes) -> bytes:
    start, end = value_of(pdf)
    used = len(pdf[start:end].rstrip(b"0"))
    place = start + used - 20
    return pdf[:place] + (b"0" if pdf[place : place + 1] != b"0" else b"1") + pdf[place + 1 :]


def update_on_another_report() -> OnFile:
    """All three updates, cut off and put behind another report of the same laboratory."""
    held = signed_report().report
    other = unsigned_report("single values")
    tail = held.pdf[len(held.unsigned) :]
    return replace(signed_report(), report=replace(held, pdf=other + tail, unsigned=other))


# --- the records


def with_record(name: str, **changes) -> Callable[[], OnFile]:
    def make() -> OnFile:
        records = dict(signed_report().report.records)
        records[name] = canonical_bytes(json.loads(records[name]) | changes)
        return signed_report().with_records(records)

    return make


def without_record() -> OnFile:
    records = dict(signed_report().report.records)
    del records["2-reviewer.json"]
    return signed_report().with_records(records)


def last_record_and_signature_but_not_the_one_before() -> OnFile:
    records = dict(signed_report().report.records)
    del records["3-approver.json"]
    return signed_report().with_records(records)


def renumbered() -> OnFile:
    records = dict(signed_report().report.records)
    first, second = json.loads(records.pop("1-author.json")), json.loads(records.pop("2-reviewer.json"))
    records["2-author.json"] = canonical_bytes(first | {"number": 2})
    records["1-reviewer.json"] = canonical_bytes(second | {"number": 1})
    return signed_report().with_records(records)


def spaced_record() -> OnFile:
    records = dict(signed_report().report.records)
    records["1-author.json"] = records["1-author.json"].replace(b",", b", ", 1)
    return signed_report().with_records(records)


def renamed_record() -> OnFile:
    records = dict(signed_report().report.records)
    records["1-approver.json"] = records.pop("1-author.json")
    return signed_report().with_records(records)


def copied(pdf: bytes) -> bytes:
    """The pages and signatures copied into a new file."""
    writer = copy_into_new_writer(PdfFileReader(io.BytesIO(pdf)))
    output = io.BytesIO()
    writer.write(output)
    return output.getvalue()


TAIL, REPORT, MATCH = (
    "nothing after the last signature",
    "begins with the unsigned report",
    "signatures and records match",
)
ONLY = "adds only a signature"

ATTACKS = (
    Attack("a bit of the sealed report", by_bytes(flipped(30000)), REPORT, "not the sealed report"),
    Attack("a bit of the first update", by_bytes(flipped_in_update), "intact", ""),
    Attack("a digit of a signature value", by_bytes(wrong_digit), "intact", ""),
    Attack("a signature value of another day", by_bytes(pasted_value), "intact", "have been changed"),
    Attack("the file written anew", by_bytes(rewritten(lambda pdf: None)), REPORT, "not the sealed"),
    Attack(
        "a page removed, file written anew",
        by_bytes(rewritten(lambda pdf: pdf.pages.__delitem__(3))),
        REPORT,
        "not the sealed",
    ),
    Attack("pages and signatures copied to a new file", by_bytes(copied), REPORT, "not the sealed"),
    Attack("a page removed by an update", by_update(remove_page), TAIL, "carry no signature"),
    Attack("a page emptied by an update", by_update(empty_page), TAIL, "carry no signature"),
    Attack("a note added by an update", by_update(add_note), TAIL, "carry no signature"),
    Attack("an attachment replaced by an update", by_update(replace_attachment), TAIL, "carry no"),
    Attack("the title changed by an update", by_update(change_title), TAIL, "carry no"),
    Attack("a printed block emptied by an update", by_update(blank_block), TAIL, "carry no"),
    Attack("a printed block moved away by an update", by_update(move_block), TAIL, "carry no"),
    Attack("a signature removed by an update", by_update(remove_value), MATCH, "3-approver.json"),
    Attack("the rights of the first signature removed", by_update(allow_more), TAIL, "carry no"),
    Attack("an update that changes nothing", by_update(nothing), TAIL, "carry no"),
    Attack(
        "another document behind the signed one", by_bytes(whole_document_after), TAIL, "does not lead back"
    ),
    Attack(
        "the last signature cut off",
        lambda: signed_report().with_pdf(signed_report().kept[1]),
        MATCH,
        "removed or cut off",
    ),
    Attack(
        "two signatures cut off", lambda: signed_report().with_pdf(signed_report().kept[0]), MATCH, "cut off"
    ),
    Attack("all signatures cut off", lambda: signed_report().with_pdf(unsigned_report()), MATCH, "cut off"),
    Attack("a line appended", by_bytes(lambda pdf: pdf + b"\n% more\n"), TAIL, "bytes follow"),
    Attack(
        "the file cut in the middle",
        by_bytes(lambda pdf: pdf[: len(pdf) - 3000]),
        "readable",
        "cannot be read",
    ),
    Attack("an empty file", by_bytes(lambda pdf: b""), "readable", "cannot be read"),
    Attack("all updates on another report", update_on_another_report, "readable", ""),
    Attack("a page emptied by the signer himself", while_signing(empty_page), ONLY, "it changes object"),
    Attack("a page removed by the signer himself", while_signing(remove_page), ONLY, "it changes object"),
    Attack("a note added by the signer himself", while_signing(add_note), ONLY, "it changes object"),
    Attack(
        "an attachment replaced by the signer himself", while_signing(replace_attachment), ONLY, "it changes"
    ),
    Attack(
        "an earlier block emptied by a later signer", while_signing(blank_block), ONLY, "it changes object"
    ),
    Attack("the title changed by the signer himself", while_signing(change_title), ONLY, "it changes object"),
    Attack("a first signature that does not certify", first_does_not_certify, ONLY, "does not certify"),
    Attack("a second signature that certifies", second_certifies_too, ONLY, "certif"),
    Attack(
        "another name printed than signed", prints_another(person="Dora Hill"), "printed block", "Dora Hill"
    ),
    Attack(
        "another day printed than signed",
        prints_another(time=SIGNED - timedelta(days=9)),
        "printed block",
        "2026-11",
    ),
    Attack(
        "another meaning printed than signed",
        prints_another(meaning="I have seen this"),
        "printed block",
        "seen",
    ),
    Attack("a font whose letters lie", font_lies, "printed block", "draws 'C', 'F'"),
    Attack(
        "a signing time before the signature before",
        signs_earlier,
        "time",
        "earlier than the signature before",
    ),
    Attack("a signing time still to come", signs_in_the_future, "time", "still to come"),
    Attack("a signature made for another folder", other_folder, "record", "another seal"),
    Attack(
        "a certificate of the same name from elsewhere",
        same_name_elsewhere,
        "certificate trusted",
        "its chain does not hold",
    ),
    Attack(
        "a certificate minted with the authority's key alone",
        minted_by_the_authority,
        "certificate enrolled",
        "never enrolled",
    ),
    Attack(
        "signatures forged from the ground with an own authority",
        forged_from_the_ground,
        "certificate trusted",
        "its chain does not hold",
    ),
    Attack(
        "a colleague's name over the own key", claims_a_colleague, "certificate valid when signed", "it names"
    ),
    Attack(
        "a certificate that had run out", runs_out_before, "certificate valid when signed", "not at the time"
    ),
    Attack(
        "signed after the revocation",
        revoked_before,
        "not revoked when signed",
        "signed after the revocation",
    ),
    Attack(
        "dated before the revocation, first witnessed after it",
        witnessed_too_late,
        "not revoked when signed",
        "first proven for",
    ),
    Attack(
        "another meaning in a record",
        with_record("2-reviewer.json", meaning="I have seen this"),
        "record",
        "meaning",
    ),
    Attack(
        "another person in a record", with_record("2-reviewer.json", person="Dora Hill"), "record", "person"
    ),
    Attack(
        "another time in a record",
        with_record("1-author.json", time="2026-12-01T10:05:08+01:00"),
        "record",
        "time",
    ),
    Attack("another seal in a record", with_record("1-author.json", seal="0f" * 32), "record", "seal"),
    Attack(
        "another certificate in a record",
        with_record("1-author.json", certificate="0f" * 32),
        "record",
        "certificate",
    ),
    Attack(
        "another digest in a record",
        with_record("3-approver.json", pdf={"bytes": 1, "sha256": "0f" * 32}),
        "record",
        "not the one that was recorded",
    ),
    Attack("a higher level in a record", with_record("3-approver.json", level="B-T"), "record", "level"),
    Attack("a key more in a record", with_record("3-approver.json", remark="fine"), MATCH, "keys"),
    Attack("a record removed", without_record, MATCH, "signature 2 (reviewer) has no record"),
    Attack("the last record removed", last_record_and_signature_but_not_the_one_before, MATCH, "signature 3"),
    Attack("two records renumbered", renumbered, "record", "role"),
    Attack("a blank in a record", spaced_record, MATCH, "canonical"),
    Attack("a record under another role's name", renamed_record, MATCH, "1-author.json"),
)
