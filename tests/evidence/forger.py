"""The hands of somebody who alters a sealed workspace, with all the skill that it takes."""

import json
import re

from assayfolio.canonical import canonical_bytes, sha256_hex


class Workspace:
    """The hands of somebody who alters what lies there, with the skill to rewrite manifests and chains."""

    def __init__(self, runs):
        self.runs = runs
        self.folio = runs / "IRON-7" / "run-0001"
        self.trail = runs / "audit-trail.jsonl"
        self.head = runs / "audit-trail.head"

    def write(self, path, content):
        target = self.folio / path
        if target.exists():
            target.chmod(0o644)
        target.parent.mkdir(parents=True, exist_ok=True)
        target.write_bytes(content)

    def edit(self, path, old, new):
        content = (self.folio / path).read_bytes()
        assert old in content
        self.write(path, content.replace(old, new, 1))

    def edit_lines(self, path, change):
        lines = (self.folio / path).read_bytes().splitlines(keepends=True)
        self.write(path, b"".join(change(lines)))

    def rewrite_manifests(self):
        """Make the folio agree with itself again."""
        payload = sorted(path for path in (self.folio / "data").rglob("*") if path.is_file())
        lines = [f"{sha256_hex(p.read_bytes())}  {p.relative_to(self.folio).as_posix()}\n" for p in payload]
        self.write("manifest-sha256.txt", "".join(lines).encode())
        size = sum(path.stat().st_size for path in payload)
        info = (self.folio / "bag-info.txt").read_text()
        oxum = f"Payload-Oxum: {size}.{len(payload)}"
        self.write("bag-info.txt", re.sub(r"Payload-Oxum: .*", oxum, info).encode())
        self.rewrite_tag_manifest()

    def rewrite_tag_manifest(self):
        tags = ("bag-info.txt", "bagit.txt", "manifest-sha256.txt")
        lines = [f"{sha256_hex((self.folio / name).read_bytes())}  {name}\n" for name in tags]
        self.write("tagmanifest-sha256.txt", "".join(lines).encode())

    def edit_run(self, **changes):
        record = json.loads((self.folio / "data" / "run.json").read_bytes())
        self.write("data/run.json", canonical_bytes(record | changes))

    def edit_trail(self, old, new):
        content = self.trail.read_bytes()
        assert old in content
        self.trail.write_bytes(content.replace(old, new, 1))

    def entries(self):
        return [json.loads(line) for line in self.trail.read_bytes().splitlines()]

    def forge(self, entries):
        """Write a trail whose numbers, chain and head are right, whatever it says."""
        previous, lines = "0" * 64, []
        for seq, entry in enumerate(entries, start=1):
            lines.append(canonical_bytes(entry | {"seq": seq, "previous": previous}))
            previous = sha256_hex(lines[-1])
        self.trail.write_bytes(b"".join(line + b"\n" for line in lines))
        self.head.write_bytes(canonical_bytes({"seq": len(lines), "sha256": previous}) + b"\n")

    def reseal(self):
        """The whole forgery: folio, its seal in the trail, the chain and the head."""
        self.rewrite_manifests()
        seal = sha256_hex((self.folio / "tagmanifest-sha256.txt").read_bytes())
        entries = self.entries()
        for entry in entries:
            if entry["action"] == "sealed" and entry["subject"] == "IRON-7/run-0001":
                entry["details"]["seal"] = seal
        self.forge(entries)

    def rebuild(self, entries):
        """The greatest forgery: trail and archive made anew from these entries, agreeing in everything.

        Each folio gets the entries of its run, its head at the start and its manifests; its seal goes into
        the entry that holds it, and so into the chain.
        """
        previous, lines = "0" * 64, []
        folio = self.folio
        for seq, entry in enumerate(entries, start=1):
            if entry["action"] in ("sealed", "registered"):
                self.folio = self.runs / entry["subject"]
                self._rewrite_record(entry["subject"], lines)
                self.rewrite_manifests()
                seal = sha256_hex((self.folio / "tagmanifest-sha256.txt").read_bytes())
                entry = entry | {"details": entry["details"] | {"seal": seal}}
            lines.append(canonical_bytes(entry | {"seq": seq, "previous": previous}))
            previous = sha256_hex(lines[-1])
        self.folio = folio
        self.trail.write_bytes(b"".join(line + b"\n" for line in lines))
        self.head.write_bytes(canonical_bytes({"seq": len(lines), "sha256": previous}) + b"\n")

    def _rewrite_record(self, subject, lines):
        own = [line for line in lines if json.loads(line)["subject"] == subject]
        self.write("data/trail.jsonl", b"".join(line + b"\n" for line in own))
        if (self.folio / "data/run.json").exists():
            before = lines.index(own[0])
            digest = sha256_hex(lines[before - 1])
            claim = json.loads((self.folio / "data/run.json").read_bytes()).get("pre_registration")
            registered = [e["time"] for e in map(json.loads, lines) if e["action"] == "registered"]
            claim = claim and claim | {"registered": registered[0]}
            self.edit_run(trail_head_at_start={"seq": before, "sha256": digest}, pre_registration=claim)
