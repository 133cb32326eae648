"""Which attacks on the PDF other programs find as well, given the PDF and the laboratory's certificate alone.

`pdfsig` finds one where it does not call every signature valid or none covers the whole document, `qpdf`
where its check complains, `openssl` where it does not verify every extracted signature up to the laboratory's
certificate. What is not in the table is found by this program only.
"""

import re
import subprocess
from pathlib import Path

import pytest

from assayfolio.evidence.signing.identities import certificate_pem
from evidence.signing.attacks import ATTACKS
from evidence.signing.office import SIGNED, office, signed_report

SIGNATURE = re.compile(rb"/ByteRange ?\[ ?0 ([0-9]+) ([0-9]+) ([0-9]+) ?\]")

FOUND: dict[str, tuple[str, ...]] = {
    "a bit of the sealed report": ("pdfsig", "qpdf", "openssl"),
    "a bit of the first update": ("pdfsig", "openssl"),
    "a digit of a signature value": ("pdfsig", "openssl"),
    "a signature value of another day": ("pdfsig", "openssl"),
    "the file written anew": ("pdfsig", "openssl"),
    "a page removed, file written anew": ("pdfsig", "openssl"),
    "pages and signatures copied to a new file": ("pdfsig", "openssl"),
    "a page removed by an update": ("pdfsig",),
    "a page emptied by an update": ("pdfsig",),
    "a note added by an update": ("pdfsig",),
    "an attachment replaced by an update": ("pdfsig",),
    "the title changed by an update": ("pdfsig",),
    "a printed block emptied by an update": ("pdfsig",),
    "a printed block moved away by an update": ("pdfsig",),
    "a signature removed by an update": ("pdfsig",),
    "the rights of the first signature removed": ("pdfsig",),
    "an update that changes nothing": ("pdfsig",),
    "another document behind the signed one": ("pdfsig",),
    "all signatures cut off": ("pdfsig", "openssl"),
    "a line appended": ("pdfsig",),
    "the file cut in the middle": ("pdfsig", "qpdf"),
    "an empty file": ("pdfsig", "qpdf", "openssl"),
    "all updates on another report": ("pdfsig", "qpdf", "openssl"),
    "a certificate of the same name from elsewhere": ("openssl",),
    "signatures forged from the ground with an own authority": ("openssl",),
    "a certificate that had run out": ("openssl",),
}


def found_by_others(pdf: bytes, folder: Path) -> tuple[str, ...]:
    """Those of pdfsig, qpdf and openssl that would not pass this file."""
    path = folder / "attacked.pdf"
    path.write_bytes(pdf)
    checks = {"pdfsig": pdfsig_passes, "qpdf": qpdf_passes, "openssl": openssl_passes}
    return tuple(name for name, passes in checks.items() if not passes(path))


def pdfsig_passes(path: Path) -> bool:
    said = subprocess.run(["pdfsig", "-nocert", path], capture_output=True, text=True, check=False).stdout
    verdicts = re.findall(r"Signature Validation: (.*)", said)
    whole = re.findall(r"^ +- Total document signed", said, re.MULTILINE)
    return set(verdicts) == {"Signature is Valid."} and len(whole) == 1


def qpdf_passes(path: Path) -> bool:
    return subprocess.run(["qpdf", "--check", path], capture_output=True, check=False).returncode == 0


def openssl_passes(path: Path) -> bool:
    """Whether every signature verifies that stands in the file, however it is read; there has to be one."""
    content, folder = path.read_bytes(), path.parent
    (folder / "ca.pem").write_bytes(certificate_pem(office().authority.certificate))
    found = [tuple(int(end) for end in each.groups()) for each in SIGNATURE.finditer(content)]
    return bool(found) and all(one_passes(content, reach, folder) for reach in found)


def one_passes(content: bytes, reach: tuple[int, ...], folder: Path) -> bool:
    first, second, length = reach
    try:
        value = bytes.fromhex(content[first + 1 : second - 1].decode("ascii"))
    except ValueError:
        return False
    (folder / "covered").write_bytes(content[:first] + content[second : second + length])
    (folder / "value").write_bytes(value[: 4 + int.from_bytes(value[2:4], "big")])
    command = ["openssl", "cms", "-verify", "-binary", "-inform", "DER", "-in", folder / "value"]
    files = ["-content", folder / "covered", "-CAfile", folder / "ca.pem", "-out", folder / "out"]
    when = ["-purpose", "any", "-attime", str(int(SIGNED.timestamp()))]
    return subprocess.run([*command, *files, *when], capture_output=True, check=False).returncode == 0


@pytest.mark.needs("pdfsig", "qpdf", "openssl")
@pytest.mark.parametrize("attack", ATTACKS, ids=[attack.name for attack in ATTACKS])
def test_what_other_programs_find_is_as_the_table_says(attack, tmp_path):
    assert found_by_others(attack.make().report.pdf, tmp_path) == FOUND.get(attack.name, ())


@pytest.mark.needs("pdfsig", "qpdf", "openssl")
def test_other_programs_find_no_fault_in_the_report_that_is_attacked(tmp_path):
    assert found_by_others(signed_report().report.pdf, tmp_path) == ()
