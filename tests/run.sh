#!/bin/sh
# Builds formsieve and runs its tests. A fresh Debian 12 machine is enough; missing packages are installed.
# Usage: sh tests/run.sh            the everyday tests
#        sh tests/run.sh --full     also the slow ones, the sanitizers, the formatting, an installed library, and warnings as errors
set -eu
root=$(cd "$(dirname "$0")/.." && pwd)
. "$root/.ci/prepare.sh"

full=no
case "${1:-}" in
  "") ;;
  --full) full=yes ;;
  *) echo "usage: sh tests/run.sh [--full]" >&2; exit 2 ;;
esac

passed=0
failed=0

# note NAME COMMAND…: runs one check that is not a CTest test and counts it.
note() {
  name=$1
  shift
  if "$@" >"$build_root/check.log" 2>&1; then
    passed=$((passed + 1))
    echo "passed: $name"
  else
    failed=$((failed + 1))
    echo "FAILED: $name"
    cat "$build_root/check.log"
  fi
}

# run_tests PRESET CTEST-ARGUMENT…: runs CTest, shows failures, and adds to the counts.
run_tests() {
  preset=$1
  shift
  echo "Testing ($preset)"
  log="$build_root/$preset.test.log"
  ctest --test-dir "$build_root/$preset" -j "$(nproc)" --output-on-failure --timeout 900 "$@" >"$log" 2>&1 || true
  total=$(sed -n 's/^.*tests passed, [0-9]* tests\{0,1\} failed out of \([0-9]*\).*$/\1/p' "$log")
  bad=$(sed -n 's/^.*tests passed, \([0-9]*\) tests\{0,1\} failed out of [0-9]*.*$/\1/p' "$log")
  if [ -z "$total" ] || [ "$total" -eq 0 ]; then
    cat "$log"
    echo "FAILED: no test ran ($preset)"
    failed=$((failed + 1))
    return 0
  fi
  [ "$bad" -eq 0 ] || cat "$log"
  passed=$((passed + total - bad))
  failed=$((failed + bad))
  sed -n '/tests passed/p;/Total Test time/p' "$log"
}

check_format() {
  (cd "$root" && git ls-files -z '*.cpp' '*.hpp' | xargs -0 clang-format --dry-run --Werror)
}

install_packages build test
note "arrows between rooms" python3 "$root/tests/check_arrows.py" "$root"
note "shell scripts parse" sh -n "$root/demo-data/run.sh"

build release
run_tests release -LE slow

if [ "$full" = yes ]; then
  run_tests release -L slow
  note "formatting" check_format
  note "the installed library is found and used" sh "$root/tests/install/run.sh" "$build_root/release"
  note "the demo runs" env FORMSIEVE_DEMO_RUN="$build_root/demo-check.run" sh "$root/demo-data/run.sh"
  warnings_are_errors=ON
  build asan
  run_tests asan -LE slow
  build tsan design_test search_test   # where threads share memory: the Gram matrices and the walk
  run_tests tsan -L parallel
fi

echo "$passed passed, $failed failed"
[ "$failed" -eq 0 ]
