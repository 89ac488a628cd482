#!/bin/bash
# SPDX-License-Identifier: GPL-3.0-or-later
# outside.sh: `terrace analyze` against samplers that others wrote, or that are written here in plain
# R: the same model, priors and data, the same figures within Monte Carlo error.
#   tests/outside/outside.sh [--only PATTERN] [SAMPLER...]   samplers: base-r jags stan (default: all)
# A sampler that is not installed is skipped with the reason. Debian's packages: r-base-core, jags,
# r-cran-rstan with libboost-dev and g++. TERRACE names the program (build/terrace), JOBS (2) how many
# cases run at once. Not part of `make test`. The last line is `N passed, N failed`.
set -u
export LC_ALL=C
cd "$(dirname "$0")/../.." || exit 1
terrace=${TERRACE:-build/terrace}
if [ ! -x "$terrace" ]; then
    echo "not ok - no program $terrace: run make first"
    echo "0 passed, 1 failed"
    exit 1
fi
if ! command -v Rscript >/dev/null; then
    echo "skip - base-r, jags, stan # Rscript is not installed (Debian: r-base-core); it drives all three"
    echo "0 passed, 0 failed"
    exit 0
fi
work=$(mktemp -d) || exit 1
trap 'rm -rf "$work"' EXIT
TERRACE=$terrace WORK=$work Rscript --vanilla tests/outside/main.R "$@" </dev/null
