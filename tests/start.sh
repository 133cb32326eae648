#!/bin/sh
# Runs the tests with their coverage; arguments go to pytest, as in
#
#     sh tests/start.sh
#     sh tests/start.sh tests/test_packaging.py -k licence
#
# The tests have an environment of their own, .venv-tests, so that the one which makes reports (and is recorded in
# every run) never holds more than the program needs. pytest works in the checkout's folder; paths among the
# arguments may be relative to the caller's.
set -eu
checkout=$(CDPATH='' cd -- "$(dirname -- "$0")/.." && pwd -P)
. "$checkout/pipeline/setup.sh"

# Outside programs that tests ask: git about the checkout, PDF tools and Java (for the PDF/A and PDF/UA validator)
# about what assayfolio writes, openssl about signatures and time stamps, softhsm2 for a key on a token, chromium for
# the pages of the register.
debian_tools="git qpdf poppler-utils default-jre-headless libjaxb-java openssl softhsm2 chromium"

missing_tools() {
    for tool in git qpdf pdfinfo pdffonts pdftoppm pdfsig java openssl softhsm2-util chromium; do
        command -v "$tool" >/dev/null 2>&1 || printf ' %s' "$tool"
    done
    [ -e /usr/share/java/jaxb-runtime.jar ] || printf ' libjaxb-java'
}

require_tools() {
    lacking=$(missing_tools)
    if [ -n "$lacking" ] && can_use_apt; then
        say "installing the programs that tests need, with apt-get (once)"
        open_log
        hold_lock
        (apt_install $debian_tools) || true
        exec 9>&-
        lacking=$(missing_tools)
    fi
    [ -n "$lacking" ] || return 0
    say "Not on this machine:$lacking. Tests that need them will not run; each is named at the end."
    say "On Debian or Ubuntu they come with: sudo apt-get install $debian_tools"
}

prepare .venv-tests "tests/requirements-build.lock tests/requirements-tests.lock"
require_tools

remaining=$#
while [ "$remaining" -gt 0 ]; do
    argument=$1
    shift
    case $argument in
        -* | /*) ;;
        *) [ ! -e "${argument%%::*}" ] || argument=$PWD/$argument ;;
    esac
    set -- "$@" "$argument"
    remaining=$((remaining - 1))
done
cd "$checkout"
# The whole suite takes one process a core; whoever asks for a part of it may want to look over its shoulder.
[ $# -gt 0 ] || set -- --numprocesses auto --dist loadfile --benchmark-disable
# Processes that tests kill leave their part of the coverage behind; not in the checkout, nor for the next time.
COVERAGE_FILE=$environment/coverage
export COVERAGE_FILE
rm -f "$COVERAGE_FILE"*
exec "$environment/bin/pytest" --cov --cov-report=term "$@"
