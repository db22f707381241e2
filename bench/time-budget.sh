#!/bin/sh
# A time budget of a minute on generated networks of 10^5 to 10^7 links: wall seconds of the whole process, probes and what ended them.
# usage: bench/time-budget.sh SCRATCH [FAMILY...]      networks are made in SCRATCH where they are not there; a row of Markdown a run
set -eu
here=$(cd "$(dirname "$0")/.." && pwd)
scratch=$1
shift
mkdir -p "$scratch"
generate="dotnet $here/data-gen/ScaleResist.DataGen/bin/Release/net10.0/ScaleResist.DataGen.dll"
estimate=${ESTIMATE:-dotnet $here/src/ScaleResist.Cli/bin/Release/net10.0/ScaleResist.Cli.dll}
[ $# -gt 0 ] || set -- grid road preferential powerlaw
for family in "$@"; do
    for links in ${LINKS:-100000 1000000 10000000}; do
        file=$scratch/$family-$links.tsv
        if [ ! -f "$file" ]; then
            case $family in
                grid) $generate grid --nodes $((links / 2)) --out "$file" ;;
                road) $generate road --nodes $((links * 10 / 13)) --out "$file" ;;
                preferential) $generate preferential --nodes $((links / 8)) --links "$links" --out "$file" ;;
                *) $generate "$family" --nodes $((links / 12)) --links "$links" --out "$file" ;;
            esac > /dev/null
        fi
        rm -rf "$scratch/lake"
        begin=$(date +%s.%N)
        exit=0
        $estimate estimate "$file" --lake "$scratch/lake" --run-id run --route probe --time-budget "${BUDGET:-60s}" \
            --want index,nodes,links > "$scratch/out" 2> "$scratch/err" || exit=$?
        seconds=$(echo "$(date +%s.%N) - $begin" | bc)
        probes=$(sed -n 's/^probes  *//p' "$scratch/out" | cut -d';' -f1)
        [ -f "$scratch/lake/run=run/_SUCCESS" ] || probes="nothing committed: $(grep -v '^\[' "$scratch/err" | head -1)"
        printf '| %s | %s | %.1f | %s | %s |\n' "$family" "$links" "$seconds" "$exit" "$probes"
    done
done
