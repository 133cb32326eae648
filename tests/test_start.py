"""The start script: installs by itself what is missing, once, and then stays out of the way.

Each test works on a miniature checkout: the real scripts, an empty lock and a program of a few lines, built
by a backend of its own so that nothing has to be fetched.
"""

import os
import shutil
import signal
import subprocess
import tempfile
import time
from pathlib import Path

import pytest

pytestmark = pytest.mark.slow

PYPROJECT = """[build-system]
requires = []
build-backend = "backend"
backend-path = ["pipeline"]

[project]
name = "assayfolio"
version = "1"
"""

BACKEND = '''"""Builds a wheel of the folder `pipeline/assayfolio` by hand."""
import zipfile
from pathlib import Path

INFO = "assayfolio-1.dist-info"

def build_wheel(wheel_directory, config_settings=None, metadata_directory=None):
    name = "assayfolio-1-py3-none-any.whl"
    with zipfile.ZipFile(Path(wheel_directory) / name, "w") as wheel:
        for path in sorted(Path("pipeline/assayfolio").rglob("*.py")):
            wheel.write(path, path.relative_to("pipeline"))
        wheel.writestr(f"{INFO}/METADATA", "Metadata-Version: 2.1\\nName: assayfolio\\nVersion: 1\\n")
        wheel.writestr(f"{INFO}/WHEEL", "Wheel-Version: 1.0\\nRoot-Is-Purelib: true\\nTag: py3-none-any\\n")
        wheel.writestr(f"{INFO}/entry_points.txt", "[console_scripts]\\nassayfolio = assayfolio:main\\n")
        wheel.writestr(f"{INFO}/RECORD", "")
    return name
'''

PROGRAM = '''"""A program that tells how it was called."""
import importlib.util
import os
import sys

def main():
    print("first edition", os.getcwd(), *sys.argv[1:], sep="|")
    print("extra module:", importlib.util.find_spec("assayfolio.extra") is not None)
    sys.exit(7)
'''


def lay_miniature(checkout: Path, root: Path) -> Path:
    """Write a small checkout, or put its sources back as they were."""
    package = root / "pipeline" / "assayfolio"
    package.mkdir(parents=True, exist_ok=True)
    for script in ("start.sh", "setup.sh"):
        shutil.copy(checkout / "pipeline" / script, root / "pipeline")
    (root / "templates").mkdir(exist_ok=True)
    (root / "templates" / "page.html").write_text("<p>page\n")
    (root / "README.md").write_text("# Miniature\n")
    (root / "LICENSE").write_text("None.\n")
    (root / "pyproject.toml").write_text(PYPROJECT)
    (root / "pipeline" / "backend.py").write_text(BACKEND)
    (package / "__init__.py").write_text(PROGRAM)
    (package / "extra.py").write_text("")
    (package / "requirements.lock").write_text("# nothing is needed\n")
    return root


def command(root: Path, *arguments: str) -> list[str]:
    return ["sh", str(root / "pipeline" / "start.sh"), *arguments]


def start(root: Path, *arguments: str, cwd=None, **options) -> subprocess.CompletedProcess[str]:
    return subprocess.run(
        command(root, *arguments), cwd=cwd or root, capture_output=True, text=True, check=False, **options
    )


@pytest.fixture
def fresh(checkout, tmp_path) -> Path:
    """A small checkout where nothing is installed, in a folder with a space in its name."""
    return lay_miniature(checkout, tmp_path / "a folder" / "checkout")


@pytest.fixture(scope="module")
def first_call(checkout, tmp_path_factory):
    """A small checkout and what its first call did, called from elsewhere in an unhelpful environment."""
    folder = tmp_path_factory.mktemp("installed")
    root = lay_miniature(checkout, folder / "a folder" / "checkout")
    (folder / "assayfolio.py").write_text("def main():\n    print('intruder')\n")
    shim = folder / "python3.13"
    shim.write_text("#!/bin/sh\nexit 127\n")  # as for a version that is known but not installed
    shim.chmod(0o755)
    unhelpful = {
        "PATH": f"{folder}{os.pathsep}{os.environ['PATH']}",
        "PYTHONPATH": str(folder),
        "PIP_USER": "1",
        "PIP_NO_COMPILE": "1",
        "PYTHONDONTWRITEBYTECODE": "1",
    }
    outcome = start(root, "run", "two words", "", "--json", cwd=folder, env={**os.environ, **unhelpful})
    return root, folder, outcome


@pytest.fixture
def installed(checkout, first_call) -> Path:
    """A small checkout that has been started before."""
    root = lay_miniature(checkout, first_call[0])
    start(root)
    return root


def test_the_first_call_installs_and_passes_everything_on(first_call):
    _, folder, outcome = first_call
    assert outcome.returncode == 7, outcome.stderr
    assert outcome.stdout == f"first edition|{folder}|run|two words||--json\nextra module: True\n"


def test_the_first_call_tells_its_steps_on_standard_error(first_call):
    _, _, outcome = first_call
    assert [line.split()[:2] for line in outcome.stderr.splitlines()] == [
        ["assayfolio:", "making"],
        ["assayfolio:", "installing"],
    ]


def test_bytecode_is_compiled_although_the_environment_forbids_it(first_call):
    root, _, _ = first_call
    assert list((root / ".venv").glob("lib/python3*/site-packages/assayfolio/__pycache__/__init__*.pyc"))


def test_no_path_of_this_machine_becomes_part_of_the_installed_package(first_call):
    root, _, _ = first_call
    assert not list((root / ".venv").glob("lib/python3*/site-packages/assayfolio-*/direct_url.json"))


def test_the_second_call_says_nothing_and_writes_nothing(installed):
    before = {path: path.stat().st_mtime_ns for path in installed.rglob("*")}
    assert start(installed).stderr == ""
    assert {path: path.stat().st_mtime_ns for path in installed.rglob("*")} == before


def test_a_changed_source_file_is_installed_again_even_with_its_old_time(installed):
    program = installed / "pipeline" / "assayfolio" / "__init__.py"
    times = program.stat()
    program.write_text(PROGRAM.replace("first edition", "other edition"))
    os.utime(program, ns=(times.st_atime_ns, times.st_mtime_ns))
    assert start(installed).stdout.startswith("other edition|")


def test_a_deleted_source_file_is_gone_after_the_next_start(installed):
    (installed / "pipeline" / "assayfolio" / "extra.py").unlink()
    assert "extra module: False" in start(installed).stdout


def test_a_changed_template_is_installed_again(installed):
    (installed / "templates" / "page.html").write_text("<p>another page\n")
    assert "installing assayfolio" in start(installed).stderr


def test_a_checkout_that_was_moved_with_its_environment_works_in_its_new_place(installed, tmp_path):
    moved = shutil.copytree(installed, tmp_path / "moved", symlinks=True)
    outcome = start(moved)
    assert outcome.returncode == 7, outcome.stderr
    assert str(installed) not in (moved / ".venv" / "bin" / "assayfolio").read_text()


def test_an_interpreter_that_vanished_is_replaced(installed):
    for name in ("python", "python3"):
        (installed / ".venv" / "bin" / name).unlink()
    (installed / ".venv" / "bin" / "python").symlink_to("/nowhere/python3")
    assert start(installed).returncode == 7


def test_a_failed_installation_is_not_believed_good(fresh):
    lock = fresh / "pipeline" / "assayfolio" / "requirements.lock"
    good = lock.read_text()
    lock.write_text("surely-not-a-package==1 --hash=sha256:" + 64 * "0" + "\n")
    offline = {**os.environ, "PIP_NO_INDEX": "1"}
    outcome = start(fresh, env=offline)
    assert outcome.returncode == 3
    assert outcome.stdout == ""
    assert "Installing the pinned packages failed" in outcome.stderr
    assert "surely-not-a-package" in outcome.stderr
    lock.write_text(good)
    assert start(fresh, env=offline).returncode == 7


@pytest.mark.parametrize("step", ["making .venv", "installing assayfolio"])
def test_an_installation_killed_midway_is_done_anew(fresh, step):
    process = subprocess.Popen(
        command(fresh),
        cwd=fresh,
        stdout=subprocess.DEVNULL,
        stderr=subprocess.PIPE,
        text=True,
        start_new_session=True,
    )
    assert any(step in line for line in process.stderr)
    time.sleep(0.5)
    os.killpg(process.pid, signal.SIGKILL)
    process.communicate()
    outcome = start(fresh)
    assert step in outcome.stderr
    assert outcome.returncode == 7, outcome.stderr


def test_two_first_calls_at_once_both_succeed(fresh):
    processes = [
        subprocess.Popen(command(fresh), cwd=fresh, stdout=subprocess.PIPE, stderr=subprocess.PIPE, text=True)
        for _ in range(2)
    ]
    spoken = [process.communicate() for process in processes]
    assert [process.returncode for process in processes] == [7, 7], spoken
    assert all(output.startswith("first edition|") for output, _ in spoken)
    assert sum("making .venv" in errors for _, errors in spoken) == 1


@pytest.fixture
def unprivileged(checkout):
    """A small checkout that everyone may read, and how to start a process without the rights of root."""
    with tempfile.TemporaryDirectory() as name:
        folder = Path(name)
        folder.chmod(0o755)
        root = lay_miniature(checkout, folder / "checkout")
        yield root, ({"user": 65534, "group": 65534} if os.geteuid() == 0 else {})
        root.chmod(0o755)


def test_a_checkout_that_cannot_be_written_to_is_explained(unprivileged):
    root, person = unprivileged
    root.chmod(0o555)
    outcome = start(root, cwd="/", env={"PATH": os.defpath}, **person)
    assert outcome.returncode == 3
    assert f"the folder {root}, or .venv.log in it, cannot be written to" in outcome.stderr
    assert outcome.stdout == ""


@pytest.fixture
def bare_path(unprivileged) -> Path:
    """A folder with the ordinary commands and no Python, to be used as the whole path."""
    folder = unprivileged[0].parent / "bin"
    folder.mkdir()
    for name in (
        "sh",
        "cat",
        "cut",
        "dirname",
        "find",
        "id",
        "mv",
        "rm",
        "sha256sum",
        "sort",
        "tail",
        "flock",
    ):
        if where := shutil.which(name):
            (folder / name).symlink_to(where)
    return folder


@pytest.mark.parametrize(
    ("installer", "advice"),
    [
        ("apt-get", "sudo apt-get update && sudo apt-get install --yes --no-install-recommends python3 "),
        ("dnf", "sudo dnf install "),
        ("apk", "apk add python3 "),
        ("brew", "brew install python"),
        (None, ""),
    ],
)
def test_without_python_the_one_command_to_run_is_named(unprivileged, bare_path, installer, advice):
    root, person = unprivileged
    root.chmod(0o777)
    if installer:
        (bare_path / installer).symlink_to("/bin/false")
    outcome = start(root, env={"PATH": str(bare_path)}, **person)
    assert outcome.returncode == 3, outcome.stderr
    assert "This machine lacks: Python 3.11 or newer" in outcome.stderr
    commands = [line for line in outcome.stderr.splitlines() if line.startswith("    ")]
    if installer:
        assert [line.strip().startswith(advice) for line in commands] == [True]
    else:
        assert commands == []
        assert "Install it by the means of your system" in outcome.stderr
    assert outcome.stdout == ""
