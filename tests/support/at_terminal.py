"""Start the program under the account that is named first, for a test that types at a real terminal."""

import sys
from unittest import mock

from assayfolio.cli.outcome import run_command
from assayfolio.cli.root import cli
from assayfolio.workflow import surroundings

if __name__ == "__main__":
    with mock.patch.object(surroundings, "account_name", return_value=sys.argv[1]):
        sys.exit(run_command(cli, sys.argv[2:]))
