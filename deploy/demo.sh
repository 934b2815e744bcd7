#!/usr/bin/env bash
# The demonstration: two winding sets judged and solved by the service, every figure compared with its golden value.
# Pictures go to demo-output/.
set -euo pipefail
cd "$(dirname "$0")/.."
. deploy/environment.sh

environment .venv service,plot
stage "demonstration"
.venv/bin/python deploy/demo "$@"
stage "done"
