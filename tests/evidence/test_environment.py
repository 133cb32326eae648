import hashlib
import importlib.metadata
import json
import os
import subprocess
import sys
import zlib
from pathlib import Path

import pytest

import assayfolio
from assayfolio.canonical import canonical_bytes
from assayfolio.evidence import environment
from assayfolio.evidence.environment import environment_record

FROM_A_FRESH_PROCESS = """
import sys
{first}
from assayfolio.canonical import canonical_bytes
from assayfolio.evidence.environment import environment_record
record = environment_record()
sys.stdout.buffer.write(canonical_bytes(record))
assert ("weasyprint" in sys.modules) == {loaded}
"""


def record_of_a_process(first="", loaded=False, **variables):
    program = FROM_A_FRESH_PROCESS.format(first=first, loaded=loaded)
    finished = subprocess.run(
        [sys.executable, "-c", program], env=os.environ | variables, capture_output=True, check=True
    )
    return json.loads(finished.stdout)


@pytest.fixture(scope="module")
def record():
    return environment_record()


def test_the_record_is_canonical_json_and_the_same_each_time(record):
    assert canonical_bytes(environment_record()) == canonical_bytes(record)


def test_two_processes_give_the_same_record_whatever_their_hash_seed():
    first, second = (record_of_a_process(PYTHONHASHSEED=seed) for seed in ("1", "2"))
    assert first["settings"]["variables"].pop("PYTHONHASHSEED") == "1"
    assert second["settings"]["variables"].pop("PYTHONHASHSEED") == "2"
    assert first == second


@pytest.mark.requirement("REPORT-8")
def test_every_installed_distribution_stands_there_once_with_version_and_digest(record):
    named = {each["name"]: each for each in record["packages"]}
    assert list(named) == sorted(named)
    assert len(named) == len(record["packages"])
    for name in ("numpy", "rfc8785", "weasyprint"):
        text = importlib.metadata.distribution(name).read_text("RECORD")
        assert named[name]["version"] == importlib.metadata.version(name)
        assert named[name]["record_sha256"] == hashlib.sha256(text.encode()).hexdigest()


def test_of_two_distributions_of_one_name_the_first_on_the_path_counts(tmp_path, monkeypatch):
    for place, version in (("first", "1.0"), ("second", "2.0")):
        folder = tmp_path / place / f"Two_Names-{version}.dist-info"
        folder.mkdir(parents=True)
        (folder / "METADATA").write_text(
            f"Metadata-Version: 2.1\nName: Two.Names\nVersion: {version}\n\ntext\n"
        )
    monkeypatch.setattr(sys, "path", [str(tmp_path / "first"), str(tmp_path / "second"), *sys.path])
    found = [each for each in environment_record()["packages"] if each["name"] == "two-names"]
    assert found == [{"name": "two-names", "version": "1.0", "licence": None, "record_sha256": None}]


@pytest.mark.requirement("NUMBERS-4")
def test_interpreter_and_machine_are_named(record):
    assert record["interpreter"]["version"] == ".".join(map(str, sys.version_info[:3]))
    assert record["interpreter"]["zlib"]["running"] == zlib.ZLIB_RUNTIME_VERSION
    executable = Path(sys.executable).resolve()
    assert record["interpreter"]["executable_sha256"] == hashlib.sha256(executable.read_bytes()).hexdigest()
    assert record["platform"]["machine"]
    assert record["platform"]["byte_order"] == sys.byteorder


def test_no_host_user_or_private_path_is_in_it(record, monkeypatch):
    text = canonical_bytes(record).decode()
    assert os.uname().nodename not in text
    assert str(Path.home()) not in text
    assert str(Path(assayfolio.__file__).parent) not in text
    assert sys.prefix not in text


@pytest.mark.skipif(not sys.platform.startswith("linux"), reason="other systems do not list loaded libraries")
class TestNativeLibraries:
    def test_are_those_of_the_renderer_once_it_is_loaded(self):
        without, having = record_of_a_process(), record_of_a_process("import weasyprint", True)
        names = {each["file"] for each in having["native_libraries"]["libraries"]}
        for wanted in ("libpango-1.0.so", "libharfbuzz.so", "libfontconfig.so", "libz.so", "libc.so"):
            assert any(name.startswith(wanted) for name in names), wanted
        before = {each["file"] for each in without["native_libraries"]["libraries"]}
        assert not any(name.startswith("libpango") for name in before)

    def test_tell_their_version_where_they_can(self):
        having = record_of_a_process("import weasyprint", True)
        versions = {
            each["file"].partition(".so")[0]: each["version"]
            for each in having["native_libraries"]["libraries"]
        }
        for name in ("libpango-1.0", "libharfbuzz", "libfontconfig", "libfreetype", "libglib-2.0", "libz"):
            assert versions[name].count(".") >= 2, name

    def test_are_named_with_the_digest_of_their_file(self):
        """Against the process's own list of mapped files."""
        maps = Path("/proc/self/maps").read_text().splitlines()
        libc = next(line.split()[-1] for line in maps if "/libc.so" in line or "/libc-" in line)
        libraries = {each["file"]: each for each in environment_record()["native_libraries"]["libraries"]}
        expected = hashlib.sha256(Path(libc).read_bytes()).hexdigest()
        assert libraries[Path(libc).name]["sha256"] == expected

    def test_of_the_python_packages_are_left_to_their_packages(self):
        having = record_of_a_process("import numpy", False)
        names = {each["file"] for each in having["native_libraries"]["libraries"]}
        assert not any("openblas" in name or "_multiarray" in name for name in names)

    def test_replaced_on_the_disk_since_they_were_loaded_have_no_digest(self, tmp_path, monkeypatch):
        maps = tmp_path / "maps"
        maps.write_text("7f00-7f01 r-xp 00000000 08:01 42    /usr/lib/libodd name.so.1 (deleted)\n")
        monkeypatch.setattr(environment, "_MAPS", maps)
        [library] = environment_record()["native_libraries"]["libraries"]
        assert library == {
            "file": "libodd name.so.1",
            "sha256": None,
            "version": None,
            "note": "replaced on the disk since it was loaded",
        }

    def test_are_said_to_be_unavailable_where_the_system_lists_none(self, tmp_path, monkeypatch):
        monkeypatch.setattr(environment, "_MAPS", tmp_path / "absent")
        libraries = environment_record()["native_libraries"]
        assert libraries == {
            "available": False,
            "reason": "the loaded libraries cannot be listed: it is not there",
        }


@pytest.mark.requirement("CONFIG-1")
def test_the_programs_fonts_and_source_have_their_digests(record, fonts_folder):
    data = {each["file"]: each["sha256"] for each in record["own_files"]["data"]}
    font = fonts_folder / "Inter-Regular.ttf"
    assert data["fonts/Inter-Regular.ttf"] == hashlib.sha256(font.read_bytes()).hexdigest()
    assert not any(name.endswith((".py", ".pyc")) for name in data)
    assert record["own_files"]["source_files"] > 10


def test_a_changed_source_file_changes_the_digest_of_the_source(tmp_path, monkeypatch):
    package = tmp_path / "a" / "b"
    package.mkdir(parents=True)
    (package / "anova.py").write_text("F = 1\n")
    monkeypatch.setattr(environment, "_PACKAGE", package)
    before = environment_record()["own_files"]
    (package / "anova.py").write_text("F = 2\n")
    after = environment_record()["own_files"]
    assert before["source_sha256"] != after["source_sha256"]
    assert (before["source_files"], before["data"]) == (1, [])


def test_settings_that_can_change_a_figure_are_told_and_paths_are_only_said_to_be_set(monkeypatch):
    monkeypatch.setenv("OPENBLAS_NUM_THREADS", "3")
    monkeypatch.setenv("FONTCONFIG_FILE", "/home/m.berg/fonts.conf")
    monkeypatch.setenv("PASSWORD", "secret")
    settings = environment_record()["settings"]
    assert settings["variables"]["OPENBLAS_NUM_THREADS"] == "3"
    assert "FONTCONFIG_FILE" in settings["variables_with_paths_set"]
    assert "secret" not in str(settings)
    assert "m.berg" not in str(settings)
