"""The run's own record (`data/run.json`), and the facts of a report made from the records of a run."""

from collections.abc import Mapping, Sequence
from importlib.resources import files
from pathlib import Path
from typing import Any

from assayfolio.canonical import Json, sha256_hex
from assayfolio.evidence.history import run_name
from assayfolio.evidence.trail import TrailHead
from assayfolio.findings import Findings
from assayfolio.findings_document import findings_bytes
from assayfolio.report.facts import (
    UNREGISTERED,
    AttachedFile,
    ElsewhereFacts,
    ExecutionFacts,
    InputFacts,
    PlanVersion,
    RegistrationFacts,
    ReportInput,
    RunFacts,
)
from assayfolio.version import VERSION
from assayfolio.workflow.clock_record import clock_facts
from assayfolio.workflow.intake import InputFile, Intake
from assayfolio.workflow.people_record import person_facts, replaced_facts
from assayfolio.workflow.surroundings import Surroundings

RUN_FORMAT = "assayfolio-run/1"
ATTACH_UP_TO_BYTES = 5 * 1024 * 1024
_ATTACHED = {"raw data": "Raw data as received", "exclusions": "Exclusions"}
NAMED_SOFTWARE = (
    "assayfolio",
    "numpy",
    "scipy",
    "weasyprint",
    "pydyf",
    "jinja2",
    "fonttools",
    "pyyaml",
    "rfc8785",
)
LAYOUT_LIBRARIES = ("libpango", "libharfbuzz", "libfontconfig", "libfreetype", "libz")


def run_record(
    intake: Intake, surroundings: Surroundings, number: int, head_at_start: TrailHead
) -> dict[str, Json]:
    """What is known of a run when its number is allotted; `completed_record` or `failed_record` ends it."""
    return {
        "format": RUN_FORMAT,
        "study": intake.study.study,
        "number": number,
        "run": run_name(number),
        "started": surroundings.started_utc,
        "started_local": surroundings.started_local,
        "actor": surroundings.actor,
        "host": surroundings.host,
        "inputs": [
            {
                "role": file.role,
                "path": file.path,
                "folio_path": file.folio_path,
                "size": file.size,
                "sha256": file.sha256,
            }
            for file in intake.files
        ],
        "pre_registration": None,
        "trail_head_at_start": {"seq": head_at_start.seq, "sha256": head_at_start.sha256},
    }


def completed_record(record: Mapping[str, Json], report: bytes) -> dict[str, Json]:
    """The record of a run that came to its end, with the digest of its report."""
    return {
        **record,
        "outcome": "completed",
        "reason": None,
        "report_sha256": sha256_hex(report),
    }


def failed_record(record: Mapping[str, Json], reason: str) -> dict[str, Json]:
    """The record of a run that failed after its number was allotted."""
    return {**record, "outcome": "failed", "reason": reason}


def bag_info(intake: Intake, surroundings: Surroundings, run: str) -> list[tuple[str, str]]:
    """The lines of `bag-info.txt`; labels of RFC 8493, section 2.2.2."""
    return [
        ("Source-Organization", intake.laboratory.name),
        ("External-Identifier", f"{intake.study.study}/{run}"),
        ("External-Description", intake.study.title),
        ("Bagging-Date", surroundings.started_utc[:10]),
        ("Bag-Software-Agent", f"assayfolio {VERSION}"),
    ]


def requirements_lock() -> bytes:
    """The hash-pinned list of packages that this version is installed from."""
    return (files("assayfolio") / "requirements.lock").read_bytes()


def run_facts(
    record: Mapping[str, Any],
    environment: Mapping[str, Any],
    history: Mapping[str, Any],
    findings_sha256: str,
    registration: RegistrationFacts = UNREGISTERED,
) -> RunFacts:
    """The facts that a report prints, from the records of the run, its environment, executions and plans."""
    versions = {package["name"]: package["version"] for package in environment["packages"]}
    return RunFacts(
        study=record["study"],
        number=record["number"],
        started_utc=record["started"],
        started_local=record["started_local"],
        actor=record["actor"],
        host=record["host"],
        inputs=tuple(
            InputFacts(item["role"], item["path"], item["folio_path"], item["size"], item["sha256"])
            for item in record["inputs"]
        ),
        findings_sha256=findings_sha256,
        trail_seq=record["trail_head_of_report"]["seq"],
        trail_sha256=record["trail_head_of_report"]["sha256"],
        python=_python_line(environment),
        platform=_platform_line(environment),
        software=tuple((name, versions[name]) for name in NAMED_SOFTWARE if name in versions),
        native_libraries=_native_libraries(environment),
        self_check=record["self_check"],
        executions=ExecutionFacts(
            number=history["execution"],
            plan=_version_facts(history),
            tried=tuple(_version_facts(use) for use in history["earlier"]),
            elsewhere=tuple(
                ElsewhereFacts(use["study"], use["run"], use["data"] == "all")
                for use in history["also_used_by"]
            ),
            void=tuple((run["run"], run["investigation"]) for run in history.get("void", ())),
        ),
        person=person_facts(record),
        replaces=replaced_facts(record),
        registration=registration,
        clock=clock_facts(record),
    )


def _version_facts(use: Mapping[str, Any]) -> PlanVersion:
    return PlanVersion(use["plan"], use["exclusions"])


def _python_line(environment: Mapping[str, Any]) -> str:
    interpreter = environment["interpreter"]
    return f"{interpreter['implementation']} {interpreter['version']}, {interpreter['compiler']}"


def _platform_line(environment: Mapping[str, Any]) -> str:
    platform = environment["platform"]
    return ", ".join(str(platform[key]) for key in ("system", "libc", "machine") if platform[key])


def _native_libraries(environment: Mapping[str, Any]) -> tuple[tuple[str, str], ...]:
    """The libraries that lay the report out: (name, version and the first digits of the digest)."""
    named = []
    for library in environment["native_libraries"].get("libraries", []):
        name = library["file"].partition(".so")[0].partition(".dylib")[0]
        if name.startswith(LAYOUT_LIBRARIES):
            version = f"{library['version']}, " if library["version"] else ""
            digest = library["sha256"]
            named.append((name, f"{version}SHA-256 {digest[:16] if digest else 'not readable'}"))
    return tuple(named)


def report_input(intake: Intake, findings: Findings, facts: RunFacts) -> ReportInput:
    """All a report is made from; raw data and exclusions up to 5 MB in all travel inside the PDF."""
    return ReportInput(
        study=intake.study,
        laboratory=intake.laboratory,
        observations=intake.observations,
        findings=findings,
        run=facts,
        attachments=tuple(_attachments(intake, findings)),
    )


def _attachments(intake: Intake, findings: Findings) -> Sequence[AttachedFile]:
    """Definition and findings; then what else was read, file by file while all together stay small."""
    kept = [file for file in intake.files if isinstance(file, InputFile)]
    study = next(file for file in kept if file.role == "study definition")
    listed = [
        AttachedFile("study.yaml", "application/yaml", "Study definition", "Source", study.content),
        AttachedFile(
            "findings.json", "application/json", "Findings, canonical JSON", "Data", findings_bytes(findings)
        ),
    ]
    left = ATTACH_UP_TO_BYTES
    separators = {raw.file: raw.separator for raw in intake.observations[0].files}
    for file in kept:
        what = _ATTACHED.get(file.role)
        if what is None or file.size > left:
            continue
        left -= file.size
        name = Path(file.folio_path).name
        media_type = _media_type(name, separators.get(file.path))
        listed.append(AttachedFile(name, media_type, what, "Source", file.content))
    return listed


def _media_type(name: str, separator: str | None) -> str:
    if name.endswith(".yaml"):
        return "application/yaml"
    if name.endswith(".xlsx"):
        return "application/vnd.openxmlformats-officedocument.spreadsheetml.sheet"
    if name.endswith(".gz"):
        return "application/gzip"
    return "text/tab-separated-values" if separator == "tab" else "text/csv"
