#!/bin/sh
# Compares the resampling with R's boot in one run, on one core: the same work,
# BCa ends included (see against_r.R and BenchmarkAgainstR). Needs R with the
# recommended package boot; a single vectorised statistic is compared with numpy
# where python3 has it.
#
#   stats/bench/against_r.sh
set -eu
cd "$(dirname "$0")/.."
command -v Rscript >/dev/null || { echo "R is missing: on Debian, apt-get install r-base-core r-cran-boot" >&2; exit 1; }
pin=""
command -v taskset >/dev/null && pin="taskset -c 0"
r=$($pin Rscript bench/against_r.R)
dir=$(mktemp -d)
trap 'rm -rf "$dir"' EXIT
go test -c -o "$dir/stats.test" .
out=$($pin "$dir/stats.test" -test.run xxx -test.bench 'AgainstR|OneStatistic' -test.cpu 1 -test.benchtime 100x)
nine=$(echo "$out" | awk '/AgainstR/ {print $3/1e9, $7, $5}')
single=$(echo "$out" | awk '/OneStatistic/ {print $3/1e9}')
n=none
if python3 -c 'import numpy' >/dev/null 2>&1; then
	n=$($pin env OMP_NUM_THREADS=1 OPENBLAS_NUM_THREADS=1 python3 bench/against_numpy.py)
fi
echo "$r $nine $single $n" | awk '{
	rs = $1 + $2
	printf "| work, one core | R | here | times faster |\n|---|---|---|---|\n"
	printf "| 10,000 row resamples of 3 lines on 60 rows, 9 statistics, BCa ends | %.3f s + %.3f s | %.5f s | %.0f |\n", $1, $2, $5, rs/$5
	if ($9 == "none") printf "numpy is missing: the single statistic was not compared (%.5f s here)\n", $8
	else printf "| 10,000 row resamples of one slope, vectorised numpy | %.4f s | %.5f s | %.1f |\n", $9, $8, $9/$8
	printf "\nBCa interval of the slope on |latitude|: R %s to %s, here %s to %s\n", $3, $4, $6, $7
}'
