"""Folios changed by somebody who rewrites whatever vouches for them inside the folder."""

import hashlib
import json
import shutil
from pathlib import Path


def writable_copy(folio: Path, target: Path) -> Path:
    """A copy of `folio` whose files can be changed."""
    shutil.copytree(folio, target)
    for path in target.rglob("*"):
        if path.is_file():
            path.chmod(0o644)
    return target


def replace_in(path: Path, old: str, new: str) -> None:
    """Replace the first `old` in a text file, which has to hold it."""
    text = path.read_text("utf-8")
    assert old in text
    path.write_text(text.replace(old, new, 1), "utf-8")


def edit_json(path: Path, edit) -> None:
    """Change a JSON document in place."""
    document = json.loads(path.read_bytes())
    edit(document)
    path.write_text(json.dumps(document), "utf-8")


def sha256(path: Path) -> str:
    return hashlib.sha256(path.read_bytes()).hexdigest()


def rebuild_manifests(folio: Path) -> None:
    """Make both manifests and the stated size agree with the files again."""
    payload = sorted(path for path in (folio / "data").rglob("*") if path.is_file())
    lines = [f"{sha256(path)}  {path.relative_to(folio).as_posix()}\n" for path in payload]
    (folio / "manifest-sha256.txt").write_text("".join(lines), "utf-8")
    info = (folio / "bag-info.txt").read_text("utf-8").splitlines()
    size = sum(path.stat().st_size for path in payload)
    stated = [
        f"Payload-Oxum: {size}.{len(payload)}" if line.startswith("Payload-Oxum") else line for line in info
    ]
    (folio / "bag-info.txt").write_text("\n".join(stated) + "\n", "utf-8")
    tags = ("bag-info.txt", "bagit.txt", "manifest-sha256.txt")
    (folio / "tagmanifest-sha256.txt").write_text(
        "".join(f"{sha256(folio / name)}  {name}\n" for name in tags), "utf-8"
    )


def restate_digests(folio: Path) -> None:
    """Make the run's record agree with the inputs, the findings and the report."""

    def edit(record: dict) -> None:
        for item in record["inputs"]:
            path = folio / item["folio_path"]
            item["sha256"], item["size"] = sha256(path), path.stat().st_size
        record["findings_sha256"] = sha256(folio / "data/findings.json")
        record["report_sha256"] = sha256(folio / "data/report.pdf")

    edit_json(folio / "data/run.json", edit)


def contents(folder: Path) -> dict[str, str]:
    """Digest of every file below `folder`."""
    return {
        path.relative_to(folder).as_posix(): sha256(path)
        for path in sorted(folder.rglob("*"))
        if path.is_file()
    }
