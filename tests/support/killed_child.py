"""Run the command line in this process and kill it at the n-th change to the disk; count them where n is 0.

    python killed_child.py N ARGUMENTS...

A change is a file opened for writing, a write, an fsync, a rename, a removal or a new folder below `runs`.
"""

import os
import signal
import sys

WRITING = os.O_WRONLY | os.O_RDWR | os.O_CREAT | os.O_TRUNC
CHANGES = {"os.rename", "os.remove", "os.mkdir", "os.truncate", "os.chmod", "fcntl.flock"}


def main() -> None:
    """Install the counter, then run the command."""
    moment, arguments = int(sys.argv[1]), sys.argv[2:]
    done = 0

    def count() -> None:
        nonlocal done
        done += 1
        if done == moment:
            os.kill(os.getpid(), signal.SIGKILL)

    def hook(event: str, details: tuple[object, ...]) -> None:
        writing = event == "open" and isinstance(details[2], int) and details[2] & WRITING
        if event in CHANGES or (writing and "/runs/" in str(details[0])):
            count()

    real_fsync, real_write = os.fsync, os.write

    def fsync(descriptor: int) -> None:
        count()
        real_fsync(descriptor)

    def write(descriptor: int, content: bytes) -> int:
        count()
        return real_write(descriptor, content)

    os.fsync, os.write = fsync, write
    from assayfolio.cli.outcome import run_command
    from assayfolio.cli.root import cli

    sys.addaudithook(hook)
    code = run_command(cli, arguments)
    sys.stderr.write(f"changes {done}\n")
    sys.exit(code)


main()
