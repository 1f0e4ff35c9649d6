# SPDX-License-Identifier: GPL-3.0-or-later
load common

setup_record() { "$CHAINEND" fit --save cal.json -o fit.txt "$data/series/certified-mn.csv"; }

@test "a saved calibration answers with the digits of its series" {
    setup_record
    run_it estimate --format json cal.json
    expect_status 0
    cp out.txt record.txt
    run_it estimate --format json "$data/series/certified-mn.csv"
    cmp out.txt record.txt
    run_it estimate --format json --tg 370K --mn 20kg/mol --monte-carlo cal.json
    cp out.txt record.txt
    run_it estimate --format json --tg 370K --mn 20kg/mol --monte-carlo "$data/series/certified-mn.csv"
    cmp out.txt record.txt
}

@test "the record names every input file with size and SHA-256" {
    "$CHAINEND" fit --save cal.json -o fit.txt "$SOURCE/examples/quellstein/series.csv"
    [ "$(jq '.files | length' cal.json)" -gt 20 ]
    jq -r '.files[] | "\(.sha256)  \(.path)"' cal.json | sha256sum --check --quiet
    jq -r '.files[] | "\(.bytes) \(.path)"' cal.json | while read -r bytes path; do
        [ "$(wc -c < "$path")" -eq "$bytes" ]
    done
    "$CHAINEND" fit --save again.json -o fit.txt "$SOURCE/examples/quellstein/series.csv"
    cmp cal.json again.json
}

@test "a record that was tampered with is refused with the place" {
    setup_record
    jq '.fit.parameters[1].u = -1' cal.json > bad.json
    run_it estimate --tg 370K bad.json
    expect_status 3
    expect_in "$err" 'bad.json: $.fit.parameters[1]: '
    jq '.schema = "chainend.calibration/9"' cal.json > bad.json
    run_it estimate --tg 370K bad.json
    expect_status 3
    expect_in "$err" "chainend.calibration/9"
    head -c 900 cal.json > bad.json
    run_it estimate --tg 370K bad.json
    expect_status 3
    expect_in "$err" "bad.json:"
}

@test "options that would change the fit of a record are refused" {
    setup_record
    for option in "--relation ueberreiter-kanig" "--scatter residuals" "--excess none" "--take onset" "--reduce-to 5K/min"; do
        # shellcheck disable=SC2086
        run_it estimate $option --tg 370K cal.json
        expect_status 3
        expect_in "$err" "${option%% *} cannot change a saved calibration"
    done
    run_it fit cal.json
    expect_status 0
    run_it series cal.json
    expect_status 3
    expect_in "$err" "is a saved calibration"
}

@test "nothing is left when a record cannot be written" {
    run_it fit --save no/such/folder/cal.json "$data/series/certified-mn.csv"
    expect_status 3
    [ ! -e no ]
}

@test "run files are read as the calibration was, repeats pooled, other rates refused" {
    "$CHAINEND" fit --save cal.json -o fit.txt "$SOURCE/examples/quellstein/series.csv"
    runs=$SOURCE/examples/quellstein/runs
    # shellcheck disable=SC2086
    run_it estimate --pool --format json cal.json $runs/X1-*
    expect_status 0
    [ "$(jq '.results | length' out.txt)" = 1 ]
    [ "$(jq '.results[0].readings' out.txt)" = 3 ]
    pooled=$(jq '.results[0].mn_g_mol' out.txt)
    run_it estimate --format json cal.json
    close '.results[0].mn_g_mol' "$pooled" 1e-9
    "$CHAINEND" simulate run --tg 70C --start 140C --ramp 10C@20 --ramp 140C@20 -o fast.csv
    run_it estimate cal.json fast.csv
    expect_status 3
    expect_in "$err" "fast.csv: measured at 20 K/min, the calibration at 10 K/min" "--despite"
    run_it estimate --despite cal.json fast.csv
    expect_status 0
    expect_in "$out" "allowed by --despite"
}

@test "the ruler is ASCII where the locale is, and when asked" {
    setup_record
    LC_ALL=C run_it estimate --tg 370K cal.json
    sed -n '/kg\/mol$/,/^ceiling/p' out.txt > ruler.txt
    ! LC_ALL=C grep -q '[^ -~]' ruler.txt
    LC_ALL=C.UTF-8 run_it estimate --tg 370K cal.json
    grep -q '●' out.txt
    LC_ALL=C.UTF-8 run_it estimate --ascii --tg 370K cal.json
    ! grep -q '●' out.txt
}

@test "the working range stands with the calibration" {
    run_it fit --format json "$data/series/certified-mn.csv"
    [ "$(jq '.working_range | length' out.txt)" = 10 ]
    jq -e '.working_range | (.[0].relative_half_width < 0.2) and (.[0].bound == "two-sided")' out.txt
    jq -e '[.working_range[].mn_g_mol] | . == sort' out.txt
}
