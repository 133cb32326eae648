"""Validate RO-Crates with roc-validator in this process, without a network; print what it says as JSON.

    python validate_crates.py CACHE_FOLDER SEVERITY CRATE...

The context that a crate names is answered from the copy that the package `rocrate` ships: that of a later
version of RO-Crate, which keeps the terms of 1.1. Any other address is refused. A process of its own, because
the validator's libraries warn and because the way out of it is replaced here.
"""

import json
import sys
from pathlib import Path
from typing import Any

import requests
import requests_cache
import rocrate
from rocrate_validator import models, services

CONTEXT = "https://w3id.org/ro/crate/1.1/context"
SHIPPED = Path(rocrate.__file__).parent / "data" / "ro-crate.jsonld"


def answer(_session: object, _method: str, url: str, *_args: Any, **_options: Any) -> requests.Response:
    """What the network would answer."""
    if url != CONTEXT:
        raise requests.ConnectionError(f"nothing but the context is to be asked for: {url}")
    response = requests.Response()
    response.status_code, response.url, response.encoding = 200, url, "utf-8"
    response.headers["Content-Type"] = "application/ld+json"
    response._content = json.dumps({"@context": json.loads(SHIPPED.read_bytes())["@context"]}).encode()
    return response


def issues(crate: str, severity: str, cache: str) -> list[list[str]]:
    """Severity, check and message of everything that the validator finds in the crate."""
    settings = models.ValidationSettings(
        rocrate_uri=crate,
        profile_identifier="process-run-crate-0.5",
        requirement_severity=models.Severity[severity],
        offline=True,
        cache_path=Path(cache) / "answers",
    )
    result = services.validate(settings)
    return [[each.severity.name, each.check.identifier, str(each.message)] for each in result.get_issues()]


if __name__ == "__main__":
    requests_cache.CachedSession.request = answer
    cache_folder, least, *crates = sys.argv[1:]
    found = {crate: issues(crate, least, cache_folder) for crate in crates}
    sys.stdout.write(json.dumps(found) + "\n")
