#!/bin/sh
# Compares the resampling with R's boot in one run, on one core: the same work,
# BCa ends included, the best of several on every side (see against_r.R and BenchmarkAgainstR). Needs R with the
# recommended package boot; a single vectorised statistic is compared with numpy
# where python3 has it.
#
#   stats/bench/against_r.sh
#
# It fails below 100 times R and 5 times numpy, what is required on a quiet
# machine of two cores.
set -eu
cd "$(dirname "$0")/.."
command -v Rscript >/dev/null || { echo "R is missing: on Debian, apt-get install r-base-core r-cran-boot" >&2; exit 1; }
pin=""
command -v taskset >/dev/null && pin="taskset -c 0"
r=$($pin Rscript bench/against_r.R)
dir=$(mktemp -d)
trap 'rm -rf "$dir"' EXIT
go test -c -o "$dir/stats.test" .
out=$($pin "$dir/stats.test" -test.run xxx -test.bench 'AgainstR|OneStatistic' -test.cpu 1 -test.benchtime 20x -test.count 5)
nine=$(echo "$out" | awk '/AgainstR/ && (!best || $3 < best) {best = $3; ends = $7 " " $5} END {print best/1e9, ends}')
single=$(echo "$out" | awk '/OneStatistic/ && (!best || $3 < best) {best = $3} END {print best/1e9}')
n=none
for python in python3 /usr/bin/python3; do # a python of one's own often stands before the system's
	if "$python" -c 'import numpy' >/dev/null 2>&1; then
		n=$($pin env OMP_NUM_THREADS=1 OPENBLAS_NUM_THREADS=1 "$python" bench/against_numpy.py)
		break
	fi
done
echo "$r $nine $single $n" | awk '{
	rs = $1 + $2
	printf "| work, one core | R | here | times faster |\n|---|---|---|---|\n"
	printf "| 10,000 row resamples of 3 lines on 60 rows, 9 statistics, BCa ends | %.3f s + %.3f s | %.5f s | %.0f |\n", $1, $2, $5, rs/$5
	if ($9 == "none") printf "numpy is missing: the single statistic was not compared (%.5f s here)\n", $8
	else printf "| 10,000 row resamples of one slope, vectorised numpy | %.4f s | %.5f s | %.1f |\n", $9, $8, $9/$8
	if (rs/$5 < 100) { slow = 1; print "Required against R: 100 times." }
	if ($9 != "none" && $9/$8 < 5) { slow = 1; print "Required against numpy: 5 times." }
	printf "\nBCa interval of the slope on |latitude|: R %s to %s, here %s to %s\n", $3, $4, $6, $7
	exit slow
}'
