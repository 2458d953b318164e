#!/bin/sh
# The main job on the demo data: builds formsieve, profiles the table, searches, prints the shortlist and one candidate in full.
# Usage: sh demo-data/run.sh        (a fresh Debian 12 machine is enough; missing packages are installed)
set -eu
root=$(cd "$(dirname "$0")/.." && pwd)
. "$root/.ci/prepare.sh"

install_packages build
build release formsieve_cli
formsieve="$build_root/release/cli/formsieve"
run_folder=${FORMSIEVE_DEMO_RUN:-$build_root/coldstores.run}

step() { printf '\n== %s\n\n' "$*"; }

step "formsieve survey demo-data/coldstores.csv"
"$formsieve" survey "$root/demo-data/coldstores.csv"

step "formsieve search demo-data/coldstores.csv --response energy_kwh"
"$formsieve" search "$root/demo-data/coldstores.csv" --response energy_kwh --out "$run_folder" --replace

step "formsieve show $run_folder 1"
"$formsieve" show "$run_folder" 1

printf '\nThe run folder is %s\nWhat is true in these data: %s\n' "$run_folder" "$root/demo-data/truth.md"
