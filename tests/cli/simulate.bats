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

# refuses OPTION ARGUMENT...: the message names OPTION and nothing is written.
refuses() {
    option=$1
    shift
    run_it simulate run -o refused.csv "$@"
    expect_status 2
    expect_in "$err" "$option"
    [ ! -e refused.csv ]
}

@test "impossible input is refused with the option named" {
    refuses --x --x 1.5
    refuses --x --x 0
    refuses --beta --beta 0
    refuses --beta --beta 1.2
    refuses --ramp --start 20C --ramp 100C@-5
    refuses --ramp --start 20C --ramp 20C@10
    refuses --hold --start 20C --hold 0s
    refuses --start --ramp 120C@10
    refuses --noise --noise -1uW
    refuses --mass --mass 0mg
    refuses --second --second 60C:1.2
    refuses --second --second 60C
    refuses --prior-rate --prior-rate 0K/min
    refuses --prior-age --prior-age 70C:-5h
    refuses --prior-age --prior-age 70C
    refuses --delimiter --delimiter colon
    refuses --decimal --decimal dot
    refuses --encoding --encoding NO-SUCH
    refuses --time-unit --time-unit h
    refuses --temperature-unit --temperature-unit F
    refuses --signal-unit --signal-unit V
    refuses --parameters --parameters x
}

@test "a run is written in the layout asked for and read back the same" {
    glass='--tg 85C --noise 2uW'
    # shellcheck disable=SC2086
    "$CHAINEND" simulate run $glass -o plain.csv
    # shellcheck disable=SC2086
    "$CHAINEND" simulate run $glass --delimiter pipe --decimal comma --encoding UTF-16LE \
        --time-unit min --temperature-unit K --signal-unit mW --sign exo-up -o other.txt
    run_it inspect --format json --mass 10mg other.txt
    expect_status 0
    expect_in "$(jq -r '.runs[0].facts[] | select(.key == "encoding").value' out.txt)" UTF-16LE
    tg() { "$CHAINEND" tg --format json --mass 10mg "$1" | jq '.runs[0].transitions[0].half_step.value_K'; }
    jq -en --argjson a "$(tg plain.csv)" --argjson b "$(tg other.txt)" '($a - $b) | fabs < 0.01'
}

@test "ageing before the run raises the overshoot" {
    below='--tg 85C --start 20C --ramp 130C@10'
    peak() { jq '.ramps[0].peak' "$1"; }
    # shellcheck disable=SC2086
    "$CHAINEND" simulate run $below --truth fresh.json -o fresh.csv
    # shellcheck disable=SC2086
    "$CHAINEND" simulate run $below --prior-age 70C:48h --truth aged.json -o aged.csv
    jq -en --argjson a "$(peak aged.json)" --argjson f "$(peak fresh.json)" '$a > $f + 0.2'
}
