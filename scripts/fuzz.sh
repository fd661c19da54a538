#!/bin/sh
# Runs every fuzz target of the module for a while: scripts/fuzz.sh GO TIME
go=$1
time=$2
set -e
log=$(mktemp)
trap 'rm -f "$log"' EXIT
for dir in $(git ls-files '*_test.go' 2>/dev/null | xargs grep -l '^func Fuzz' | xargs -n1 dirname | sort -u); do
	for target in $(grep -h '^func Fuzz' "$dir"/*_test.go | sed 's/^func \(Fuzz[A-Za-z0-9_]*\).*/\1/' | sort); do
		echo "fuzz $dir $target for $time"
		$go test "./$dir" -run '^$' -fuzz "^$target\$" -fuzztime "$time" -fuzzminimizetime 1x >"$log" 2>&1 || { cat "$log"; exit 1; }
		tail -n 1 "$log"
	done
done
