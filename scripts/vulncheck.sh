#!/bin/sh
# Runs govulncheck; where its database can't be reached, says so and passes.
go=$1
out=$($go tool govulncheck ./... 2>&1)
rc=$?
if [ $rc = 1 ] && echo "$out" | grep -q 'fetching vulnerabilities'; then
	echo 'SKIPPED govulncheck: vulnerability database unreachable; known vulnerabilities were NOT checked'
	exit 0
fi
[ $rc = 0 ] || echo "$out"
exit $rc
