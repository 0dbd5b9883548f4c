#!/bin/sh
# Builds the Ceres peer into target/peers/, or says clearly why it is skipped.
#   apt-get install libceres-dev     (Ceres 2.1 on Debian 12)
set -e
here=$(cd "$(dirname "$0")" && pwd)
out="$here/../../../target/peers"
if ! command -v g++ > /dev/null; then
    echo "skipped: no g++" >&2
    exit 3
fi
if ! echo '#include <ceres/ceres.h>' | g++ -I/usr/include/eigen3 -E -x c++ - > /dev/null 2>&1; then
    echo "skipped: the Ceres headers are not installed (libceres-dev)" >&2
    exit 3
fi
mkdir -p "$out"
g++ -std=c++17 -O3 -march=native -DNDEBUG -I/usr/include/eigen3 \
    "$here/main.cc" -o "$out/ceres-expander" -lceres -lglog -lgflags
echo "$out/ceres-expander"
