"""The one funnel from errors to words and exit codes."""

import json
import os
import sys
import traceback
import unicodedata
from collections.abc import Sequence

import click

from assayfolio.errors import AssayfolioError, ExitCode, InputError


def printable(text: str) -> str:
    """`text` for a terminal: control and formatting characters appear escaped, line ends stay."""
    return "".join(
        character
        if character in "\n\t" or unicodedata.category(character) not in {"Cc", "Cf", "Cs", "Zl", "Zp"}
        else character.encode("unicode_escape").decode("ascii")
        for character in text
    )


def called_as() -> str:
    """How the person calls this program: the start script says so, otherwise its own name."""
    return os.environ.get("ASSAYFOLIO_CALLED_AS", "assayfolio")


def say(text: str) -> None:
    """One piece of text on standard output."""
    click.echo(printable(text))


def complain(text: str) -> None:
    """One piece of text on standard error."""
    click.echo(printable(text), err=True)


def _drop_output() -> None:
    """Send what is still waiting to be written nowhere: the interpreter's end would only fail on it again."""
    try:
        descriptor = sys.stdout.fileno()
    except (OSError, ValueError):
        return  # not a file of the system
    nowhere = os.open(os.devnull, os.O_WRONLY)
    os.dup2(nowhere, descriptor)
    os.close(nowhere)


def _error_document(error: AssayfolioError) -> dict[str, object]:
    faults = error.faults if isinstance(error, InputError) else ()
    return {
        "exit_code": int(error.exit_code),
        "error": error.headline if isinstance(error, InputError) else str(error),
        "faults": [
            {
                "file": fault.place.file,
                "line": fault.place.line,
                "column": fault.place.column,
                "found": fault.found,
                "advice": fault.advice,
            }
            for fault in faults
        ],
        "more_faults": error.hidden if isinstance(error, InputError) else 0,
    }


def run_command(command: click.Command, arguments: Sequence[str] | None, name: str = "assayfolio") -> int:
    """Run `command`; turn every error into words on standard error; return the exit code."""
    wants_json = "--json" in (sys.argv[1:] if arguments is None else arguments)
    for stream in (sys.stdout, sys.stderr):
        reconfigure = getattr(stream, "reconfigure", None)
        if reconfigure is not None:
            reconfigure(errors="backslashreplace")
    try:
        answer = command.main(args=arguments, prog_name=name, standalone_mode=False)
        sys.stdout.flush()
    except click.ClickException as error:
        error.show()
        return int(ExitCode.INPUT)
    except AssayfolioError as error:
        complain(str(error))
        if wants_json:
            say(json.dumps(_error_document(error), ensure_ascii=False, indent=1))
        return int(error.exit_code)
    except SystemExit:  # the library's answer to a reader of our output that has gone
        _drop_output()
        return int(ExitCode.MACHINE)
    except (click.Abort, KeyboardInterrupt):
        complain("Stopped by the person who started it.")
        return int(ExitCode.MACHINE)
    except OSError as error:
        _drop_output()
        complain(f"The machine refused a file operation: {error}.")
        return int(ExitCode.MACHINE)
    except Exception:  # noqa: BLE001 - the last resort: a fault of ours, told with its traceback
        complain("An unexpected fault in Assayfolio itself; please report it with the lines below.")
        complain(traceback.format_exc())
        return int(ExitCode.MACHINE)
    return int(answer or ExitCode.DONE)
