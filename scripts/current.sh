#!/bin/sh
# Fails if a generated file isn't what make generate writes now.
go=$1
set -e
fresh=$(mktemp -d)
trap 'rm -rf "$fresh"' EXIT
sh scripts/generate.sh "$go" "$fresh"
(cd "$fresh" && find . -type f) | while read -r file; do
	cmp -s "$fresh/$file" "$file" || { echo "$file isn't current: run make generate" >&2; exit 1; }
done
echo "generated files are current"
