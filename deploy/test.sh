#!/usr/bin/env bash
# The test command. `--long` adds the tests that take minutes and the oldest grpcio and protobuf we promise to run on.
# Any other argument goes to pytest.
set -euo pipefail
cd "$(dirname "$0")/.."
. deploy/environment.sh

long=no
for argument in "$@"; do
  if [ "$argument" = --long ]; then long=yes; fi
done

environment .venv service,plot,cluster,dev
export PATH="$PWD/.venv/bin:$PATH"

stage "lint";              ruff check --quiet .
stage "format";            ruff format --quiet --check .
stage "types";             mypy
stage "contract lint";     buf lint proto
stage "contract breaking"; buf breaking proto --against proto/contract.binpb
stage "house rules";       python -m pytest tests/house
red=0  # a red test does not keep the last stage from being seen
stage "tests";             python -m pytest tests --ignore=tests/house --durations=10 "$@" || red=1

if [ "$long" = yes ]; then
  # The floors stand in pyproject.toml only; here they become pins.
  floors=$(python - <<'PYTHON'
import re, tomllib
project = tomllib.load(open("pyproject.toml", "rb"))["project"]
needed = project["dependencies"] + project["optional-dependencies"]["service"]
print(*(line.replace(">=", "==") for line in needed if re.match(r"(grpcio|protobuf)", line)))
PYTHON
)
  # shellcheck disable=SC2086 — one pin a word
  environment .venv-floor service,plot,dev $floors
  stage "oldest grpcio and protobuf"
  .venv-floor/bin/python -m pytest tests/codec tests/client tests/server || red=1
fi
if [ "$red" != 0 ]; then stage "tests failed, see above"; exit 1; fi
stage "all passed"
