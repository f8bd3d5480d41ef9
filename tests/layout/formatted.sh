#!/usr/bin/env bash
# Every C++ file looks as .clang-format says.
set -euo pipefail
cd "$1"
command -v clang-format >/dev/null || { echo "skipped: clang-format is not installed"; exit 77; }
find src include tests -name '*.cpp' -o -name '*.hpp' | xargs clang-format --dry-run -Werror
