"""Time stamps by RFC 3161 over HTTP, and the material for checking signatures without a network later."""

from dataclasses import dataclass
from typing import Any

from assayfolio.evidence.signing.refusals import StampUnavailableError

_LARGEST_ANSWER = 1 << 20


@dataclass(frozen=True, slots=True)
class TimeStampAuthority:
    """Where time stamps come from, and how many seconds to wait for one."""

    url: str
    wait_seconds: float = 10.0


@dataclass(frozen=True, slots=True)
class ValidationMaterial:
    """Certificates and revocation lists (DER) that go into the document for a check in later years."""

    certificates: tuple[bytes, ...]
    revocation_lists: tuple[bytes, ...]


def ask(authority: TimeStampAuthority, query: bytes) -> bytes:
    """The authority's answer to `query`. Raises StampUnavailableError for anything but an answer."""
    import urllib.error
    import urllib.request

    if not authority.url.startswith(("http://", "https://")):
        raise StampUnavailableError(f"{authority.url!r} is no web address of a time-stamp authority")
    request = urllib.request.Request(  # noqa: S310 - the scheme has just been looked at
        authority.url,
        data=query,
        headers={"Content-Type": "application/timestamp-query", "Accept": "application/timestamp-reply"},
    )
    try:
        with urllib.request.urlopen(request, timeout=authority.wait_seconds) as answer:  # noqa: S310
            content: bytes = answer.read(_LARGEST_ANSWER)
    except (OSError, ValueError) as error:
        reason = error.reason if isinstance(error, urllib.error.URLError) else error
        raise StampUnavailableError(f"no time stamp from {authority.url}: {reason}") from error
    return content


def time_stamper(authority: TimeStampAuthority) -> Any:
    """The signing library's object that asks `authority`; it raises StampUnavailableError."""
    from asn1crypto import tsp
    from pyhanko.sign.timestamps import TimeStamper

    class Asking(TimeStamper):
        """Asks over HTTP; whatever is wrong with the answer becomes one error."""

        async def async_request_tsa_response(self, req: Any) -> Any:
            return tsp.TimeStampResp.load(ask(authority, req.dump()))

        async def async_timestamp(self, message_digest: Any, md_algorithm: Any) -> Any:
            try:
                token = await super().async_timestamp(message_digest, md_algorithm)
                found = token["content"]["encap_content_info"]["content"].parsed["message_imprint"]
                stamped = found["hashed_message"].native
            except (OSError, ValueError, TypeError, KeyError, AttributeError) as error:
                raise StampUnavailableError(
                    f"the answer of {authority.url} is no time stamp: {error}"
                ) from error
            if stamped != message_digest:
                raise StampUnavailableError(f"the time stamp of {authority.url} is for something else")
            return token

    make: Any = Asking
    return make()
