#!/usr/bin/env bash
# build_consumer.sh CMAKE BUILD_DIR PROJECT CXX FLAGS
set -euo pipefail
cmake=$1 build=$2 project=$3 cxx=$4 flags=$5
place=$(mktemp -d)
trap 'rm -rf "$place"' EXIT
"$cmake" --install "$build" --prefix "$place/installed" >/dev/null
"$cmake" -S "$project" -B "$place/build" -DCMAKE_PREFIX_PATH="$place/installed" -DCMAKE_CXX_COMPILER="$cxx" \
  -DCMAKE_CXX_FLAGS="$flags" >/dev/null
"$cmake" --build "$place/build"
"$place/build/consumer"
"$place/installed/bin/stillmass" --version
