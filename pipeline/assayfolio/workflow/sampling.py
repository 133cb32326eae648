"""A random sample of folios that anyone can draw again: stated to the byte, with nothing but SHA-256.

The algorithm "assayfolio-sample/1": for each folio the SHA-256 of the ASCII text `assayfolio-sample/1`, a
zero byte, the seed as a decimal number in ASCII, a zero byte and the folio's subject ("WTR-017/run-0001") in
UTF-8. The sample of N are the N folios with the smallest digests. Every set of N folios is as likely as any
other as far as SHA-256 is random, and whoever knows the seed beforehand knows the sample: let the auditor
choose it.
"""

import hashlib
from collections.abc import Iterable

ALGORITHM = "assayfolio-sample/1"


def sampled(subjects: Iterable[str], number: int, seed: int) -> tuple[str, ...]:
    """`number` of the subjects, or all where there are no more, in the order of their names."""

    def digest(subject: str) -> bytes:
        message = b"\0".join((ALGORITHM.encode(), str(seed).encode(), subject.encode("utf-8")))
        return hashlib.sha256(message).digest()

    return tuple(sorted(sorted(set(subjects), key=digest)[:number]))
