"""Checks a sealed folder with nothing but Python 3.8 or later: python3 data/check_folio.py [TRAIL.JSONL]

Files against both manifests, the run's lines of the audit trail, the analysis of variance from the exact
sums; with a trail (all of it, or the lines that came with a copy) also its chain, the run's lines in it, and
the seal.
Exit code 0: all of it agrees; 1: something does not.
"""

import hashlib
import json
import sys
from fractions import Fraction
from pathlib import Path

FOLDER = Path(__file__).resolve().parent.parent
wrong = []


def sha256(content):
    return hashlib.sha256(content).hexdigest()


def lines_of(path):
    return [line for line in path.read_bytes().split(b"\n") if line]


def check(holds, words):
    print(("agrees   " if holds else "DIFFERS  ") + words)
    if not holds:
        wrong.append(words)


def check_manifest(name):
    for line in (FOLDER / name).read_text("utf-8").splitlines():
        digest, _, path = line.partition("  ")
        file = FOLDER / path
        if not file.is_file() or sha256(file.read_bytes()) != digest:
            check(False, path + " against " + name)


def check_chain(lines, name):
    """Each entry carries the digest of the line before, wherever that line is there."""
    entries = [json.loads(line) for line in lines]
    digests = {entry["seq"]: sha256(line) for entry, line in zip(entries, lines)}
    broken = [e["seq"] for e in entries if digests.get(e["seq"] - 1, e["previous"]) != e["previous"]]
    rising = all(a["seq"] < b["seq"] for a, b in zip(entries, entries[1:]))
    words = " entries, each carries the digest before it"
    check(rising and not broken, name + ": " + str(len(lines)) + words)
    return entries


def check_trail(trail, own, seal):
    lines = lines_of(trail)
    entries = check_chain(lines, trail.name)
    gapless = [e["seq"] for e in entries] == list(range(entries[0]["seq"], entries[0]["seq"] + len(lines)))
    check(gapless, trail.name + ": numbered without a gap")
    check(set(own) <= set(lines), "the lines of data/trail.jsonl stand in " + trail.name)
    subject = json.loads(own[0])["subject"]
    sealed = [e for e in entries if e["action"] == "sealed" and e["subject"] == subject]
    stated = [e["details"]["seal"] for e in sealed]
    check(stated == [seal], "the seal of " + subject + " stands in " + trail.name)
    print("         head of " + trail.name + ": entry " + str(entries[-1]["seq"]) + ", " + sha256(lines[-1]))


def check_analysis(name, response):
    """The analysis of variance from n, sum and sum of squares, in exact fractions."""
    keys = ("n", "sum", "sum_of_squares")
    sums = [[Fraction(level["sums"][key]) for key in keys] for level in response["levels"]]
    k, n, total = len(sums), sum(s[0] for s in sums), sum(s[1] for s in sums)
    between = sum(s * s / m for m, s, _ in sums) - total * total / n
    within = sum(q - s * s / m for m, s, q in sums)
    stated = response["anova"]
    check(float(between) == stated["between"]["ss"], name + ": between levels, SSB = " + repr(float(between)))
    check(float(within) == stated["within"]["ss"], name + ": within levels, SSW = " + repr(float(within)))
    if stated["f"] is not None:
        f = float((between / (k - 1)) / (within / (n - k)))
        check(f == stated["f"], name + ": F = " + repr(f))


check_manifest("manifest-sha256.txt")
check_manifest("tagmanifest-sha256.txt")
check(not wrong, "every file against its manifest")
seal = sha256((FOLDER / "tagmanifest-sha256.txt").read_bytes())
print("         seal of this folder: " + seal)
own = lines_of(FOLDER / "data" / "trail.jsonl")
check_chain(own, "data/trail.jsonl")
for trail in sys.argv[1:]:
    check_trail(Path(trail), own, seal)
findings = FOLDER / "data" / "findings.json"
if findings.is_file():
    for name, response in sorted(json.loads(findings.read_text("utf-8"))["responses"].items()):
        check_analysis(name, response)
sys.exit(1 if wrong else 0)
