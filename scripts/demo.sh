#!/usr/bin/env bash
# Analyses a structure of structures_demo and writes the page of its report to demo_output:
#   scripts/demo.sh                  calcite
#   scripts/demo.sh gypsum.cif       any other file of structures_demo, or a path of your own
set -u
source "$(dirname "${BASH_SOURCE[0]}")/environment.sh"
use_environment || exit 1

file="${1:-calcite.cif}"
[ -e "$file" ] || file="$REPOSITORY/structures_demo/$file"
name="$(basename "$file")"
page="$REPOSITORY/demo_output/${name%.*}.html"
mkdir -p "$REPOSITORY/demo_output"

"$VENV/bin/sitesym" report "$file" || exit $?
"$VENV/bin/sitesym" report "$file" --format html --output "$page" || exit $?
echo
echo "The same as a page, with pictures: $page"
