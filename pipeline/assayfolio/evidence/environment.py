"""The environment a run was made in: interpreter, machine, packages, native libraries, own files, settings.

What is recorded would let another person rebuild the environment, or say in which respect theirs differs.
No host name, user name or private path is in it: packages and libraries go by name and digest. Nothing is
imported for the record's sake; the native libraries are those that the process has loaded by now, so the
caller loads the renderer first.
"""

import ctypes
import importlib.metadata
import locale
import os
import platform
import re
import sys
import sysconfig
import zlib
from collections.abc import Callable, Iterator, Mapping
from pathlib import Path

from assayfolio.canonical import Json, canonical_digest, sha256_hex
from assayfolio.evidence.files import plain_reason
from assayfolio.evidence.inventory import FoundFile, look_at_file, take_inventory

FORMAT = "assayfolio-environment/1"

# Settings of the process that can change a figure, a line break or the order of a set.
_PLAIN_SETTINGS = re.compile(
    r"(LANG|LANGUAGE|LC_[A-Z]+|TZ|SOURCE_DATE_EPOCH|PYTHONHASHSEED|PYTHONUTF8|GLIBC_TUNABLES"
    r"|(OMP|OPENBLAS|MKL|BLIS|NUMEXPR|VECLIB|NPY)_[A-Z0-9_]+)"
)
# These hold paths, so only that they are set is kept.
_PATH_SETTINGS = ("FONTCONFIG_FILE", "FONTCONFIG_PATH", "LD_LIBRARY_PATH", "LD_PRELOAD", "PYTHONPATH")
_MAPS = Path("/proc/self/maps")
_PACKAGE = Path(__file__).parent.parent


def environment_record() -> Mapping[str, Json]:
    """The record, ready for canonical JSON; the same process state gives the same record.

    Keys: format, interpreter, platform, packages (name, version, licence as the package declares it, SHA-256
    of the installed RECORD, null where there is none), native_libraries, own_files, settings. Raises no error
    for what cannot be found out: the record then says so.
    """
    return {
        "format": FORMAT,
        "interpreter": _interpreter(),
        "platform": _platform(),
        "packages": _packages(),
        "native_libraries": _native_libraries(),
        "own_files": _own_files(),
        "settings": _settings(),
    }


def _interpreter() -> Mapping[str, Json]:
    build = platform.python_build()
    return {
        "implementation": platform.python_implementation(),
        "version": platform.python_version(),
        "build": " ".join(build),
        "compiler": platform.python_compiler(),
        "executable_sha256": look_at_file(Path(os.path.realpath(sys.executable))).sha256,
        "zlib": {"built_with": zlib.ZLIB_VERSION, "running": zlib.ZLIB_RUNTIME_VERSION},
    }


def _platform() -> Mapping[str, Json]:
    try:
        system = platform.freedesktop_os_release().get("PRETTY_NAME", platform.system())
    except OSError:
        system = f"{platform.system()} {platform.mac_ver()[0]}".strip()
    return {
        "system": system,
        "kernel": f"{platform.system()} {platform.release()}",
        "libc": " ".join(platform.libc_ver()).strip() or None,
        "machine": platform.machine(),
        "processor": _processor(),
        "byte_order": sys.byteorder,
    }


def _processor() -> str | None:
    try:
        with Path("/proc/cpuinfo").open(encoding="utf-8", errors="replace") as file:
            named = (line.partition(":")[2].strip() for line in file if line.startswith("model name"))
            return next(named, None)
    except OSError:
        return platform.processor() or None


def _packages() -> list[Json]:
    """Every installed distribution; of two with one name the one that an import would find."""
    found: dict[str, Mapping[str, Json]] = {}
    for distribution in importlib.metadata.distributions():
        # The header alone, by pattern: a full parse of every METADATA takes three times as long.
        metadata = distribution.read_text("METADATA") or distribution.read_text("PKG-INFO") or ""
        header = metadata.partition("\n\n")[0]
        name, version = (re.search(rf"^{key}: *(.+)$", header, re.MULTILINE) for key in ("Name", "Version"))
        if name is None:
            continue
        plain = re.sub(r"[-_.]+", "-", name[1].strip()).lower()
        record = distribution.read_text("RECORD")
        if plain not in found:
            found[plain] = {
                "name": plain,
                "version": version[1].strip() if version else None,
                "licence": _licence(header),
                "record_sha256": sha256_hex(record.encode("utf-8")) if record else None,
            }
    return [found[name] for name in sorted(found)]


def _licence(header: str) -> str | None:
    """The licence that a package declares: its expression, its classifiers, or the one line of its old field.

    Core metadata 2.4 has the expression; before it, classifiers and a free text that may be a whole licence.
    """
    expression = re.search(r"^License-Expression: *(.+)$", header, re.MULTILINE)
    if expression:
        return expression[1].strip()
    classifier = r"^Classifier: License :: (?:OSI Approved :: )?(?!OSI Approved$)(.+)$"
    classified = re.findall(classifier, header, re.MULTILINE)
    if classified:
        return "; ".join(name.strip() for name in classified)
    text = re.search(r"^License: *(.+)$(?!\n )", header, re.MULTILINE)
    return text[1].strip() if text else None


def _native_libraries() -> Mapping[str, Json]:
    try:
        lines = _MAPS.read_text(encoding="utf-8", errors="surrogateescape").splitlines()
    except OSError as error:
        return {"available": False, "reason": f"the loaded libraries cannot be listed: {plain_reason(error)}"}
    own = _python_folders()
    paths = {line.split(None, 5)[5] for line in lines if len(line.split(None, 5)) == 6}
    listed = [
        _library(path) for path in paths if re.search(r"\.so(\.|$| )", path) and not path.startswith(own)
    ]
    # Two libraries of one name and digest, in two folders, are one fact.
    unique = {(str(each["file"]), str(each["sha256"])): each for each in listed}
    return {"available": True, "libraries": [unique[key] for key in sorted(unique)]}


def _python_folders() -> tuple[str, ...]:
    """Where the Python environment and its packages lie; other libraries are the system's."""
    own = {sysconfig.get_path(key) for key in ("stdlib", "platstdlib", "purelib", "platlib")}
    own.add(os.path.join(sys.base_prefix, "lib", f"python{sysconfig.get_python_version()}"))  # noqa: PTH118
    if sys.prefix != sys.base_prefix:
        own.add(sys.prefix)
    return tuple(f"{folder}/" for folder in own if folder)


def _library(path: str) -> Mapping[str, Json]:
    gone = path.endswith(" (deleted)")
    file = FoundFile(0, None) if gone else look_at_file(Path(os.path.realpath(path)))
    name = path.removesuffix(" (deleted)").rpartition("/")[2]
    shown = name.encode("utf-8", "backslashreplace").decode("utf-8")
    facts: dict[str, Json] = {"file": shown, "sha256": file.sha256, "version": None}
    if gone:
        facts["note"] = "replaced on the disk since it was loaded"
    else:
        facts["version"] = _library_version(name, path)
    return facts


def _text_of(symbol: str) -> Callable[[ctypes.CDLL], str | None]:
    def ask(library: ctypes.CDLL) -> str | None:
        function = getattr(library, symbol)
        function.restype, function.argtypes = ctypes.c_char_p, []
        answer: bytes | None = function()
        return answer.decode("ascii", "replace") if answer else None

    return ask


def _fontconfig(library: ctypes.CDLL) -> str:
    number = int(library.FcGetVersion())
    return f"{number // 10000}.{number // 100 % 100}.{number % 100}"


def _glib(library: ctypes.CDLL) -> str:
    parts = (ctypes.c_uint.in_dll(library, f"glib_{part}_version") for part in ("major", "minor", "micro"))
    return ".".join(str(part.value) for part in parts)


def _freetype(library: ctypes.CDLL) -> str | None:
    handle = ctypes.c_void_p()
    if library.FT_Init_FreeType(ctypes.byref(handle)) != 0:
        return None
    numbers = [ctypes.c_int() for _ in range(3)]
    library.FT_Library_Version(handle, *(ctypes.byref(number) for number in numbers))
    library.FT_Done_FreeType(handle)
    return ".".join(str(number.value) for number in numbers)


# From memory of each library's public header: the function or variables that tell its version.
_VERSIONS: Mapping[str, Callable[[ctypes.CDLL], str | None]] = {
    "libpango-1.0": _text_of("pango_version_string"),
    "libharfbuzz": _text_of("hb_version_string"),
    "libz": _text_of("zlibVersion"),
    "libexpat": _text_of("XML_ExpatVersion"),
    "libfontconfig": _fontconfig,
    "libglib-2.0": _glib,
    "libfreetype": _freetype,
}


def _library_version(name: str, path: str) -> str | None:
    """What the loaded library says of itself; None for those that are not asked or do not answer."""
    ask = _VERSIONS.get(name.partition(".so")[0])
    if ask is None:
        return None
    try:
        return ask(ctypes.CDLL(path))
    except (OSError, AttributeError, ValueError):
        return None


def program_digest() -> str:
    """One digest of the program itself: its source, fonts, templates and other data."""
    return canonical_digest(_own_files())


def _own_files() -> Mapping[str, Json]:
    """Digests of the program itself: one of all its source, one each of fonts, templates and other data."""
    found = dict(_digests(_PACKAGE, ""))
    beside = _PACKAGE.parent.parent / "templates"
    if not (_PACKAGE / "templates").exists() and beside.is_dir():
        # In a checkout the templates lie beside the source; an installed package carries them inside.
        found.update(_digests(beside, "templates/"))
    source = {path: digest for path, digest in found.items() if path.endswith(".py")}
    data = [{"file": path, "sha256": found[path]} for path in sorted(found) if path not in source]
    return {"source_sha256": canonical_digest(source), "source_files": len(source), "data": data}


def _digests(folder: Path, prefix: str) -> Iterator[tuple[str, str | None]]:
    for path, file in take_inventory(folder).files.items():
        parts = path.split("/")
        if not any(part == "__pycache__" or part.startswith(".") for part in parts):
            yield f"{prefix}{path}", file.sha256


def _settings() -> Mapping[str, Json]:
    plain = {name: os.environ[name] for name in sorted(os.environ) if _PLAIN_SETTINGS.fullmatch(name)}
    shown = {name: value.encode("utf-8", "backslashreplace").decode("utf-8") for name, value in plain.items()}
    return {
        "variables": shown,
        "variables_with_paths_set": [name for name in _PATH_SETTINGS if name in os.environ],
        "locale": locale.setlocale(locale.LC_ALL),
        "file_system_encoding": sys.getfilesystemencoding(),
        "utf8_mode": bool(sys.flags.utf8_mode),
        "hash_randomization": bool(sys.flags.hash_randomization),
        "optimization": sys.flags.optimize,
        "decimal_digits_of_a_float": sys.float_info.dig,
    }
