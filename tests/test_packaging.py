"""What is installed: the package with all its data, and pinned requirements that anyone can install."""

import re
import shutil
import subprocess
import sys
import tomllib
import zipfile

import pytest

RUNTIME_LOCK = "pipeline/assayfolio/requirements.lock"
TESTS_LOCK = "tests/requirements-tests.lock"
BUILD_LOCK = "tests/requirements-build.lock"
LOCKS = (RUNTIME_LOCK, TESTS_LOCK, BUILD_LOCK)
PINNED = re.compile(r"^([a-z0-9.-]+)==([^\s;\\]+)( ; .+?)?(?: \\)?$")
HASH = re.compile(r"^    --hash=sha256:[0-9a-f]{64}(?: \\)?$")


@pytest.fixture(scope="module")
def project(checkout):
    return tomllib.loads((checkout / "pyproject.toml").read_text(encoding="utf-8"))


@pytest.fixture(scope="module")
def lock_lines(checkout):
    return {name: (checkout / name).read_text(encoding="utf-8").splitlines() for name in LOCKS}


def pinned(lines) -> dict[str, str]:
    return {match[1]: match[2] for line in lines if (match := PINNED.match(line))}


def plain_name(requirement: str) -> str:
    return re.split(r"[<>=!~ \[;]", requirement)[0].lower().replace("_", "-")


@pytest.mark.parametrize("name", LOCKS)
def test_a_lock_holds_pinned_packages_and_hashes_and_nothing_else(lock_lines, name):
    strange = [
        line
        for line in lock_lines[name]
        if line and not line.lstrip().startswith("#") and not PINNED.match(line) and not HASH.match(line)
    ]
    assert strange == []


@pytest.mark.parametrize("name", LOCKS)
def test_every_package_of_a_lock_has_a_hash(lock_lines, name):
    lines = lock_lines[name]
    assert pinned(lines)
    bare = [
        line
        for line, following in zip(lines, [*lines[1:], ""], strict=True)
        if PINNED.match(line) and not HASH.match(following)
    ]
    assert bare == []


@pytest.mark.parametrize("name", LOCKS)
def test_a_lock_names_neither_an_index_nor_a_place(lock_lines, name):
    text = "\n".join(lock_lines[name])
    assert not re.search(r"://|index|find-links|trusted-host|(?<![a-z])/[a-z]+/", text)


def test_the_runtime_lock_holds_what_the_project_asks_for_and_its_build_backend(project, lock_lines):
    wanted = {plain_name(text) for text in project["project"]["dependencies"]}
    wanted |= {plain_name(text) for text in project["build-system"]["requires"]}
    assert wanted <= pinned(lock_lines[RUNTIME_LOCK]).keys()


def test_the_runtime_lock_is_free_of_what_only_tests_need(project, lock_lines):
    tests_alone = {plain_name(text) for text in project["dependency-groups"]["tests"]}
    tests_alone -= {"fonttools"}  # WeasyPrint needs it too
    assert tests_alone.isdisjoint(pinned(lock_lines[RUNTIME_LOCK]))


def test_the_tests_lock_holds_what_the_tests_ask_for(project, lock_lines):
    wanted = {plain_name(text) for text in project["dependency-groups"]["tests"]}
    assert wanted <= pinned(lock_lines[TESTS_LOCK]).keys()


@pytest.mark.parametrize("name", [RUNTIME_LOCK, BUILD_LOCK])
def test_tests_run_with_the_versions_that_users_have(lock_lines, name):
    other, tests = pinned(lock_lines[name]), pinned(lock_lines[TESTS_LOCK])
    assert {package: tests.get(package) for package in other} == other


def test_every_package_folder_is_listed(checkout, project):
    source = checkout / "pipeline"
    folders = {".".join(path.parent.relative_to(source).parts) for path in source.rglob("__init__.py")}
    assert set(project["tool"]["setuptools"]["packages"]) == folders | {"assayfolio.templates"}


@pytest.fixture(scope="module")
def wheel_files(checkout, tmp_path_factory) -> set[str]:
    """The names in a wheel built from a copy of this checkout."""
    folder = tmp_path_factory.mktemp("wheel")
    source = folder / "source"
    ignored = shutil.ignore_patterns("__pycache__", "*.egg-info", ".?*")
    for name in ("pipeline", "templates"):
        shutil.copytree(checkout / name, source / name, ignore=ignored)
    for name in ("pyproject.toml", "README.md", "LICENSE"):
        shutil.copy(checkout / name, source)
    build = "import sys, setuptools.build_meta as backend; print(backend.build_wheel(sys.argv[1]))"
    outcome = subprocess.run(
        [sys.executable, "-c", build, folder], cwd=source, capture_output=True, text=True, check=False
    )
    assert outcome.returncode == 0, outcome.stderr
    with zipfile.ZipFile(folder / outcome.stdout.splitlines()[-1]) as wheel:
        return set(wheel.namelist())


def test_the_wheel_holds_every_module(checkout, wheel_files):
    source = checkout / "pipeline"
    modules = {path.relative_to(source).as_posix() for path in source.rglob("*.py")}
    assert {name for name in wheel_files if name.endswith(".py")} == modules


def test_the_wheel_holds_every_template(checkout, wheel_files):
    folder = checkout / "templates"
    templates = {path.relative_to(folder).as_posix() for path in folder.rglob("*") if path.is_file()}
    assert templates
    assert {
        name.removeprefix("assayfolio/templates/") for name in wheel_files if "/templates/" in name
    } == templates


def test_the_wheel_holds_every_data_file_of_the_package(checkout, wheel_files):
    source = checkout / "pipeline"
    data = {
        path.relative_to(source).as_posix()
        for path in (source / "assayfolio").rglob("*")
        if path.is_file() and path.suffix not in {".py", ".pyc"} and "/." not in str(path.relative_to(source))
    }
    assert {"assayfolio/py.typed", "assayfolio/requirements.lock", "assayfolio/fonts/OFL.txt"} <= data
    assert data <= wheel_files


def test_the_wheel_holds_the_licence_and_the_command(wheel_files):
    assert any(name.endswith(".dist-info/licenses/LICENSE") for name in wheel_files)
    assert any(name.endswith(".dist-info/entry_points.txt") for name in wheel_files)


def test_module_and_command_are_the_same_program(project):
    target = project["project"]["scripts"]["assayfolio"]
    module, function = target.split(":")
    called = f"import sys; sys.argv = ['assayfolio', '--version']; from {module} import {function} as f; f()"
    by_command = subprocess.run([sys.executable, "-c", called], capture_output=True, text=True, check=True)
    by_module = subprocess.run(
        [sys.executable, "-m", "assayfolio", "--version"], capture_output=True, text=True, check=True
    )
    assert by_module.stdout == by_command.stdout != ""
