#!/bin/sh
# Make the hash-pinned locks from pyproject.toml. Needs `uv` and a package index; run it to take newer versions.
#
#     sh tests/generate/make_locks.sh             resolve; keep the versions that the locks hold and still fit
#     sh tests/generate/make_locks.sh --upgrade   resolve; take the newest versions
#
# The locks are universal (every platform, Python >= 3.11, one version of a package for all) and name no index:
# where packages come from is the business of whoever installs. The tests' lock holds the runtime lock's
# packages in the same versions, so that the tests meet what a user runs. The third and smallest holds what builds
# the one package of the tests that comes as source; it is installed before that.
set -eu
cd "$(dirname "$0")/../.."

runtime=pipeline/assayfolio/requirements.lock
tests=tests/requirements-tests.lock
build=tests/requirements-build.lock
UV_CUSTOM_COMPILE_COMMAND="sh tests/generate/make_locks.sh"
export UV_CUSTOM_COMPILE_COMMAND

lock() {
    uv pip compile --quiet --no-config --universal --python-version 3.11 --fork-strategy fewest \
        --generate-hashes --no-emit-index-url --no-emit-find-links "$@" >/dev/null
}

lock pyproject.toml --group build --output-file "$runtime" "$@"
lock pyproject.toml --group build-tests --group tests --constraints "$runtime" --output-file "$tests" "$@"
lock --group build-tests --constraints "$tests" --output-file "$build" "$@"
