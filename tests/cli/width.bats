# SPDX-License-Identifier: GPL-3.0-or-later
load common

@test "no line of text output is wider than 100 columns" {
    series=$SOURCE/examples/quellstein/series.csv
    "$CHAINEND" fit --save cal.json --resamples 100 "$series" > fit.txt
    "$CHAINEND" series "$series" > series.txt
    "$CHAINEND" tg "$SOURCE"/examples/quellstein/runs/Q[1-4]-1* > tg.txt
    "$CHAINEND" tg "$SOURCE/examples/quellstein/runs/Q5-1.txt" > one.txt
    "$CHAINEND" inspect "$SOURCE/examples/quellstein/runs/Q5-1.txt" > inspect.txt
    "$CHAINEND" estimate --monte-carlo cal.json > estimate.txt
    "$CHAINEND" check cal.json > check.txt
    "$CHAINEND" plan --at 10kg/mol --at 90kg/mol --want 5% cal.json > plan.txt || true
    for f in fit series tg one inspect estimate check plan; do
        [ -s $f.txt ]
        python3 - $f.txt <<'EOF'
import sys, unicodedata
for line in open(sys.argv[1], encoding="utf-8"):
    width = sum(0 if unicodedata.combining(c) else 1 for c in line.rstrip("\n"))
    assert width <= 100, (sys.argv[1], width, line)
EOF
    done
}
