#!/bin/sh
# Installs a build into a temporary prefix and builds and runs a program that finds it there. Usage: sh tests/install/run.sh BUILD_FOLDER
set -eu
here=$(cd "$(dirname "$0")" && pwd)
scratch=$(mktemp -d)
trap 'rm -rf "$scratch"' EXIT
cmake --install "$1" --prefix "$scratch/prefix"
cmake -S "$here" -B "$scratch/build" -G Ninja -DCMAKE_PREFIX_PATH="$scratch/prefix" -DCMAKE_BUILD_TYPE=Release
cmake --build "$scratch/build"
"$scratch/build/consumer" "$here/../reference/open/trees.csv" "$scratch/out.run" | grep -q 'ln(girth)'
"$scratch/prefix/bin/formsieve" --version
