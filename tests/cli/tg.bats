# SPDX-License-Identifier: GPL-3.0-or-later
load common

setup_file() { export runs=$SOURCE/examples/quellstein/runs; }

# The truth of every simulated run is recorded beside the example; the reader gets no option.
@test "half-steps of the example come within 0.6 K of their truth in all four layouts" {
    jq -r '.samples[].readings[] | [.run, .tg_K] | @tsv' "$SOURCE/examples/quellstein/truth.json" > truth.tsv
    [ "$(wc -l < truth.tsv)" = 39 ]
    (cd "$SOURCE/examples/quellstein" && "$CHAINEND" tg --format json $(cut -f1 "$BATS_TEST_TMPDIR/truth.tsv")) > out.txt
    jq -r '.runs[] | [.run, .transitions[0].half_step.value_K] | @tsv' out.txt > got.tsv
    paste truth.tsv got.tsv | awk '$1 != $3 { exit 1 } { d = $4 - $2; if (d < 0) d = -d; if (d > 0.6) { print; bad = 1 } } END { exit bad }'
}

@test "tg as JSON keeps its contract" {
    run_it tg --format json "$runs/Q5-1.txt" "$runs/Q5-3.csv" nowhere.csv
    expect_status 1
    expect_in "$err" "chainend tg: nowhere.csv: "
    [ "$(jq -r .schema out.txt)" = "chainend.tg/1" ]
    [ "$(jq -c '[.runs[].status]' out.txt)" = '["ok","ok","refused"]' ]
    [ "$(jq -r '.runs[1].segment | "\(.kind) \(.heating_number)"' out.txt)" = "heating 2" ]
    jq -e '.runs[0].transitions[0] | [.onset, .midpoint, .half_step, .inflection, .end, .fictive] | all(.value_K > 300 and .u_K > 0)' out.txt
    jq -e '.runs[0].transitions[0].step_height | .unit == "J/(g K)" and .value > 0.25 and .value < 0.36' out.txt
    jq -e '.runs[2].transitions == [] and (.runs[2].message | length > 0)' out.txt
}

@test "the taken construction is named, the windows can be given" {
    run_it tg --take fictive "$runs/Q5-1.txt"
    expect_status 0
    expect_in "$(sed -n 1p out.txt)" "°C, u = " "(fictive, heating 1 at 10.00 K/min)"
    run_it tg --glass-window 50:70 --liquid-window 100C:120C "$runs/Q5-1.txt"
    expect_status 0
    expect_in "$out" "(windows as given)"
    run_it tg --take middle "$runs/Q5-1.txt"
    expect_status 2
    run_it tg --glass-window 70:50 "$runs/Q5-1.txt"
    expect_status 2
    expect_in "$err" "--glass-window: '70:50' is not a range: the first value must be the lower"
}

@test "a run without a step, without temperatures, or empty is refused in one line, the others go on" {
    awk 'BEGIN { print "Time (s),Temperature (°C),Heat flow endo up (W/g)"; for (i = 0; i < 600; i++) print i * 1.2 "," 20 + i * 0.2 "," 0.2 + i * 0.0001 }' > flat.csv
    printf 'Time (s),Pressure (bar),Heat flow (mW)\n' > p.csv
    for i in $(seq 20); do echo "$i,$i,$i"; done >> p.csv
    : > empty.csv
    run_it tg flat.csv p.csv empty.csv "$runs/Q5-1.txt"
    expect_status 1
    expect_in "$err" "flat.csv: no step" "would have been seen" "p.csv:1: no column holds the temperature" "empty.csv"
    [ "$(wc -l < err.txt)" = 3 ]
    expect_in "$out" "Tg (half_step) of 1 of 4 runs"
    run_it tg flat.csv
    expect_status 3
}

@test "inspect says what it understood and what it guessed" {
    run_it inspect "$runs/Q5-1.txt"
    expect_status 0
    expect_in "$out" "Windows-1252" "semicolon" "comma" "7.801 mg" "exo up" "heating 1" "overrule with --decimal"
    run_it inspect --format json "$runs/Q5-3.csv"
    [ "$(jq -c '[.runs[0].segments[].kind]' out.txt)" = '["heating","cooling","isothermal","heating"]' ]
}

@test "columns can be named or numbered, units and sign overruled" {
    awk 'BEGIN { print "alpha;beta (K);gamma;delta (°C)"; for (i = 0; i < 400; i++) { T = 300 + 0.3 * i
        v = -0.2 - 0.05 / (1 + exp(-(T - 360) / 1.5)); t = T - 273.15; print i * 1.8 ";" 300 ";" v ";" t } }' > odd.txt
    run_it tg odd.txt
    expect_status 3
    run_it tg --format json --time-column alpha --time-unit s --temperature-column 4 --signal-column gamma \
        --signal-unit W/g --sign exo-up odd.txt
    expect_status 0
    close '.runs[0].transitions[0].half_step.value_K' 360 0.0003
    run_it tg --temperature-column 9 odd.txt
    expect_status 3
    expect_in "$err" "odd.txt:1: --temperature-column: there is no column '9'"
}

@test "figures: scripts are the same bytes each time, pictures are drawn, hostile names stay text" {
    run_it figure run -o a.gp --picture a.svg "$runs/Q5-1.txt"
    expect_status 0
    head -c 100 a.svg | grep -q '<?xml'
    (mkdir -p elsewhere && cd elsewhere && "$CHAINEND" figure run "$runs/Q5-1.txt" > ../b.gp)
    cmp a.gp b.gp
    run_it figure calibration --picture c.png -o c.gp "$SOURCE/examples/quellstein/series.csv"
    expect_status 0
    [ "$(od -An -c -N4 c.png | tr -d ' \n')" = '211PNG' ]
    cp "$runs/Q5-1.txt" "'; system('touch pwned'); \`touch pwned\` \$(touch pwned).txt"
    run_it figure run --picture d.svg -o d.gp ./*pwned*.txt
    expect_status 0
    [ ! -e pwned ]
    run_it figure run --picture d.bmp "$runs/Q5-1.txt"
    expect_status 2
    PATH=/nonexistent "$CHAINEND" figure run --picture e.svg -o e.gp "$runs/Q5-1.txt" 2> err.txt
    err=$(cat err.txt)
    [ -s e.gp ]
    [ ! -e e.svg ]
    expect_in "$err" "gnuplot is not installed"
}

@test "options of --help and of the manual page are the same" {
    for c in $("$CHAINEND" --help | sed -n '/^commands:/,/^$/s/^  \([a-z]*\) .*/\1/p'); do
        "$CHAINEND" "$c" --help | sed -n '/^options:/,/^example:/p' | grep -oE '^  (-[a-z], |    )--[a-z-]+' |
            grep -oE -e '--[a-z-]+' | sort -u > help.txt
        grep -oE 'Fl -[a-z][a-z-]*' "$SOURCE/man/chainend-$c.1" | sed 's/Fl -/--/' | sort -u > man.txt
        diff -u man.txt help.txt || { echo "$c"; return 1; }
    done
}
