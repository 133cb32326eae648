#!/bin/sh
# Runs assayfolio from this checkout and passes every argument on, as in
#
#     sh pipeline/start.sh run configs/STUDY.yaml
#
# The first call installs what is missing (see setup.sh); later calls only compare digests. Exit code 3 means that
# the machine lacks something, 4 that another installation holds the checkout; all others are assayfolio's own.
set -eu
checkout=$(CDPATH='' cd -- "$(dirname -- "$0")/.." && pwd -P)
. "$checkout/pipeline/setup.sh"

prepare .venv pipeline/assayfolio/requirements.lock
case $0 in
    *[!A-Za-z0-9_./-]*) ASSAYFOLIO_CALLED_AS="sh '$0'" ;;
    *) ASSAYFOLIO_CALLED_AS="sh $0" ;;
esac
export ASSAYFOLIO_CALLED_AS
exec "$environment/bin/assayfolio" "$@"
