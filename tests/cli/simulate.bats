# SPDX-License-Identifier: GPL-3.0-or-later
load common

@test "a simulated run is read back with the Tg of its truth" {
    run_it simulate run --tg 85C --h 88000 --x 0.42 --beta 0.62 --noise 2uW --truth t.json -o r.csv
    expect_status 0
    run_it tg --format json r.csv
    expect_status 0
    want=$(jq '.ramps[] | select(.kind == "heating") | .half_step_K' t.json)
    close '.runs[0].transitions[0].half_step.value_K' "$want" 0.0015
}

@test "the same seed gives the same bytes on any number of threads" {
    common='--standard A:2kg/mol --standard B:20kg/mol --unknown X:9kg/mol --parameters 362,115000 --mn-u 5% --run-sd 0.4 --noise 5uW --programme-tg 85C'
    # shellcheck disable=SC2086
    "$CHAINEND" simulate series $common -o one
    # shellcheck disable=SC2086
    "$CHAINEND" simulate series $common --threads 4 -o four
    diff -r one four
    # shellcheck disable=SC2086
    "$CHAINEND" simulate series $common --seed 2 -o other
    ! cmp -s one/series.csv other/series.csv
}

@test "the example is what its script makes, byte for byte" {
    "$SOURCE/examples/generate" "$CHAINEND" made
    for f in series.csv truth.csv truth.json; do cmp "made/$f" "$SOURCE/examples/quellstein/$f"; done
    diff -r made/runs "$SOURCE/examples/quellstein/runs"
}

@test "impossible input is refused with the option named" {
    for bad in "--x 1.5" "--x 0" "--beta 0" "--beta 1.2" "--start 20C --ramp 100C@-5" "--start 20C --hold 0s" \
        "--noise -1uW" "--mass 0mg" "--start 20C --ramp 20C@10"; do
        # shellcheck disable=SC2086
        run_it simulate run $bad
        expect_status 2
        expect_in "$err" "${bad%% *}" || expect_in "$err" "--ramp" || expect_in "$err" "--hold"
    done
}
