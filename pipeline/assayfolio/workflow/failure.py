"""Words for a failure: one line for the trail, and the whole account for the folio."""

import traceback

from assayfolio.errors import AssayfolioError


def failure_text(error: BaseException) -> tuple[str, str]:
    """The reason in one paragraph, and the full account of what happened, as text."""
    if isinstance(error, AssayfolioError):
        return str(error), f"{error}\n"
    account = "".join(traceback.format_exception(error))
    if isinstance(error, KeyboardInterrupt):
        return "Stopped by the person who started it.", account
    if isinstance(error, MemoryError):
        return "The machine has too little memory for this run.", account
    if isinstance(error, OSError):
        return f"The machine refused a file operation: {error}.", account
    return f"An unexpected fault in Assayfolio itself: {type(error).__name__}: {error}.", account
