# Shared by pipeline/start.sh and tests/start.sh; POSIX sh, sourced, never run. Expects `checkout`: the absolute
# path of this checkout. What it says goes to standard error: standard output belongs to the program.
#
# An environment counts as good only while two stamps inside it agree with what is wanted: `stamp-requirements`
# (place of the environment, version of its interpreter, content of the locks) and `stamp-package` (content of
# every file that goes into the package). Each is removed before the work it vouches for and written after it.

log=$checkout/.venv.log            # what installers said; also the file that is locked while something is installed
patience=900                       # seconds to wait for another installation
package_files="pyproject.toml README.md LICENSE pipeline templates"
debian_python="python3 python3-venv ca-certificates"
debian_libraries="libpango-1.0-0 libpangoft2-1.0-0 libharfbuzz0b libharfbuzz-subset0 libfontconfig1"

python=
suitable='import sys, ctypes, ensurepip, ssl, venv; sys.exit(sys.version_info < (3, 11))'

# The caller's shell may point Python at other packages; results come from the pinned ones alone.
unset PYTHONHOME PYTHONPATH

if command -v sha256sum >/dev/null 2>&1; then
    checksum=sha256sum
elif command -v shasum >/dev/null 2>&1; then
    checksum="shasum -a 256"
else
    checksum="cksum"
fi

say() {
    printf 'assayfolio: %s\n' "$1" >&2
}

stop() {
    say "$1"
    exit "${2:-3}"
}

# --- what is there, and what should be ---

digest() {
    $checksum | cut -d ' ' -f 1
}

package_digest() {
    (
        cd "$1" || exit
        find $package_files \( -name __pycache__ -o -name '*.egg-info' -o -name '.?*' \) -prune -o -type f -exec $checksum {} +
    ) | LC_ALL=C sort | digest
}

requirements_digest() {
    {
        printf '%s\n' "$environment"
        "$environment/bin/python" -V 2>&1
        (cd "$checkout" && cat $locks)
    } | digest
}

stamped() {
    [ -f "$environment/stamp-$1" ] && [ "$(cat "$environment/stamp-$1")" = "$2" ]
}

stamp() {
    printf '%s\n' "$2" >"$environment/stamp-$1.new" && mv "$environment/stamp-$1.new" "$environment/stamp-$1" ||
        stop "The installation could not be completed: $environment cannot be written to."
}

has_requirements() {
    [ -x "$environment/bin/python" ] && stamped requirements "$(requirements_digest)"
}

has_package() {
    stamped package "$(package_digest "$checkout")"
}

# --- one installation at a time ---

open_log() {
    (: >>"$log") 2>/dev/null || stop "Nothing can be installed: the folder $checkout, or .venv.log in it, \
cannot be written to. Copy the checkout to a folder of your own, or let its owner start it once."
    exec 9>>"$log"
}

# Before Python is there, only apt-get is ever started, and Debian always has flock.
try_lock() {
    if command -v flock >/dev/null 2>&1; then
        flock -n 9
    elif [ -n "$python" ]; then
        "$python" -I -c 'import fcntl; fcntl.flock(9, fcntl.LOCK_EX | fcntl.LOCK_NB)' 2>/dev/null
    fi
}

# The lock belongs to the open file, so it ends with the processes that hold it, however they end.
hold_lock() {
    waited=0
    until try_lock; do
        [ "$waited" -gt 0 ] || say "another start is installing; waiting for it (at most $((patience / 60)) minutes)"
        [ "$waited" -lt "$patience" ] || stop "The other installation did not end; try again later." 4
        sleep 1
        waited=$((waited + 1))
    done
}

# Runs an installer with its words in the log; if it fails, shows the end of them and stops.
quietly() {
    doing=$1
    shift
    "$@" </dev/null >>"$log" 2>&1 || {
        tail -n 20 "$log" >&2
        stop "$doing failed; the last lines of the log are above, all of it is in $log."
    }
}

# --- the system's part: Python and the libraries that set the report ---

# Leaves the first suitable interpreter on the path in `python`. Each is run, not only looked up: a name on the path
# may be a shim for a version that is not installed, and Debian's python3 may come without venv.
find_python() {
    for name in python3.13 python3.12 python3.11 python3 python3.14 python; do
        separators=$IFS
        IFS=:
        for folder in $PATH; do
            IFS=$separators
            python=$folder/$name
            if [ -x "$python" ] && "$python" -I -c "$suitable" </dev/null >/dev/null 2>&1; then
                return 0
            fi
        done
        IFS=$separators
    done
    python=
    return 1
}

missing_libraries() {
    "$python" -I - <<'PROBE'
import ctypes
import sys

stems = (("gobject-2.0", "0"), ("pango-1.0", "0"), ("pangoft2-1.0", "0"), ("harfbuzz", "0"),
         ("harfbuzz-subset", "0"), ("fontconfig", "1"))
missing = []
for stem, major in stems:
    suffix = f".{major}.dylib" if sys.platform == "darwin" else f".so.{major}"
    try:
        ctypes.CDLL(f"lib{stem}{suffix}")
    except OSError:
        missing.append(f"lib{stem}")
print(", ".join(missing))
PROBE
}

# Sets `lacking` to words for what the machine lacks, empty if nothing, and `needed` to Debian's packages for it.
look_at_machine() {
    if find_python; then
        lacking=$(missing_libraries)
        needed=$debian_libraries
    else
        lacking="Python 3.11 or newer with its venv module (and perhaps the libraries Pango, HarfBuzz and fontconfig)"
        needed="$debian_python $debian_libraries"
    fi
}

can_use_apt() {
    [ "$(id -u)" = 0 ] && command -v apt-get >/dev/null 2>&1
}

apt_install() {
    apt="apt-get -qq -o DPkg::Lock::Timeout=300 -o Dpkg::Use-Pty=0"
    DEBIAN_FRONTEND=noninteractive
    export DEBIAN_FRONTEND
    # A package list that cannot be renewed is no reason to stop: the old one may do.
    $apt update </dev/null >>"$log" 2>&1 || true
    quietly "Installing with apt-get" $apt install --yes --no-install-recommends "$@"
}

command_for_this_system() {
    if command -v apt-get >/dev/null 2>&1; then
        echo "sudo apt-get update && sudo apt-get install --yes --no-install-recommends $needed"
    elif command -v dnf >/dev/null 2>&1; then
        echo "sudo dnf install --assumeyes python3.12 pango harfbuzz fontconfig"
    elif command -v apk >/dev/null 2>&1; then
        echo "apk add python3 pango harfbuzz-subset fontconfig"
    elif command -v brew >/dev/null 2>&1; then
        echo "brew install python@3.13 pango harfbuzz fontconfig"
    fi
}

explain_and_stop() {
    say "This machine lacks: $lacking."
    advice=$(command_for_this_system)
    if [ -n "$advice" ]; then
        say "This command installs it (it needs the right to install); then start again:"
        printf '    %s\n' "$advice" >&2
    else
        say "Install it by the means of your system, then start again."
    fi
    exit 3
}

require_machine() {
    look_at_machine
    [ -n "$lacking" ] || return 0
    can_use_apt || explain_and_stop
    say "installing Python and the libraries that set the report, with apt-get (once)"
    apt_install $needed
    look_at_machine
    [ -z "$lacking" ] || stop "apt-get installed what it has, and this machine still lacks: $lacking. \
Install it by other means, then start again."
}

# --- the environment ---

in_environment() {
    # pip's own configuration counts (index, certificates, proxies), save for a wish to install elsewhere.
    PIP_USER=0 "$environment/bin/python" -I -m pip --quiet --disable-pip-version-check --no-input "$@"
}

install_requirements() {
    rm -f "$environment/stamp-requirements" "$environment/stamp-package"
    say "making ${environment##*/} with $("$python" -V) and the pinned packages (once, a minute or two)"
    quietly "Making ${environment##*/}" "$python" -I -m venv --clear "$environment"
    for lock in $locks; do
        quietly "Installing the pinned packages" \
            in_environment install --require-hashes --no-build-isolation --compile --requirement "$checkout/$lock"
    done
    stamp requirements "$(requirements_digest)"
}

copy_package_files() {
    rm -rf "$1" && mkdir -p "$1" && (cd "$checkout" && cp -R $package_files "$1/") &&
        find "$1" \( -name __pycache__ -o -name '*.egg-info' -o -name '.?*' \) -prune -exec rm -rf {} +
}

# Built from a copy: what an earlier build left behind can not get in, and the checkout stays clean. Installed by
# name from a folder, so that no path of this machine becomes part of the installed package.
install_package() {
    rm -f "$environment/stamp-package"
    say "installing assayfolio from this checkout into ${environment##*/}"
    build=$environment/build
    quietly "Copying the sources" copy_package_files "$build/source"
    quietly "Building assayfolio" in_environment wheel --no-deps --no-build-isolation --no-index \
        --wheel-dir "$build" "$build/source"
    quietly "Installing assayfolio" in_environment install --no-deps --no-index --force-reinstall --compile \
        --find-links "$build" assayfolio
    built=$(package_digest "$build/source")
    rm -rf "$build"
    stamp package "$built"
}

# prepare NAME LOCKS: makes $checkout/NAME hold the packages of LOCKS (paths in the checkout, in order) and this
# checkout's package; sets `environment`. Returns at once if it does already.
prepare() {
    environment=$checkout/$1
    locks=$2
    if has_requirements && has_package; then
        return 0
    fi
    open_log
    hold_lock
    : >"$log"
    require_machine
    hold_lock
    has_requirements || install_requirements
    has_package || install_package
    exec 9>&-
}
