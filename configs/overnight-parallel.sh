#!/bin/sh
# An overnight search split into parts that GNU parallel runs, one a core:
#
#   sh overnight-parallel.sh DESIGN RUN PARTS --starts 5000
#   drawtube gather RUN
#
# Run again after anything, it does what is missing and nothing else. More hosts: give parallel
# --sshlogin and RUN on a shared disk. DRAWTUBE names the program, if it is not on the path.
set -eu
design=$1 run=$2 parts=$3
shift 3
seq "$parts" | parallel --quote --halt never \
  "${DRAWTUBE:-drawtube}" overnight "$design" --run "$run" --part "{}/$parts" \
  --threads 1 --quiet "$@"
