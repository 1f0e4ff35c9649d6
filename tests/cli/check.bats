# SPDX-License-Identifier: GPL-3.0-or-later
load common

controls() { # controls TG DATE [TG DATE...]: a control of 20 kg/mol, 2 %
    printf '# construction: half_step\n# rate: 10 K/min\n# history: erased\n'
    printf 'sample,role,mn (g/mol),mn_u (%%),tg (K),date\n'
    while [ $# -gt 0 ]; do
        printf 'C,control,20000,2,%s,%s\n' "$1" "$2"
        shift 2
    done
}

@test "a calibration that holds" {
    "$CHAINEND" fit --save cal.json -o fit.txt "$data/series/certified-mn.csv"
    controls 379.0 2026-01-10 379.3 2026-02-11 378.9 2026-03-12 > c.csv
    run_it check cal.json c.csv
    expect_status 0
    expect_in "$(head -n 1 out.txt)" "The calibration holds: 1 control"
    expect_in "$out" "2026-02-11" "control chart"
    run_it check --format json cal.json c.csv
    [ "$(jq -r .schema out.txt)" = chainend.check/1 ]
    # curve at 20 kg/mol: 379.0426958 K (York regression, computed with numpy)
    close '.controls[0].expected_K' 379.0426958 1e-9
    close '.controls[0].difference_K' 0.0239708667 1e-4
    [ "$(jq '.chart | length' out.txt)" = 3 ]
}

@test "one that does not gives exit status 1 and says what to do" {
    "$CHAINEND" fit --save cal.json -o fit.txt "$data/series/certified-mn.csv"
    controls 383.0 2026-01-10 383.3 2026-02-11 > c.csv
    run_it check cal.json c.csv
    expect_status 1
    expect_in "$(head -n 1 out.txt)" "does not hold"
    expect_in "$out" "action" "calibrate again"
    run_it check --format csv cal.json c.csv
    expect_status 1
    [ "$(sed -n 2p out.txt | sed 's/.*,//')" = no ]
}

@test "controls measured in another way are refused" {
    "$CHAINEND" fit --save cal.json -o fit.txt "$data/series/certified-mn.csv"
    controls 379.0 2026-01-10 | sed 's/rate: 10/rate: 20/' > c.csv
    run_it check cal.json c.csv
    expect_status 3
    expect_in "$err" "measured at 20 K/min, the calibration at 10 K/min"
    run_it check --despite cal.json c.csv
    expect_status 0
    expect_in "$out" "allowed by --despite"
    controls 379.0 2026-01-10 | sed 's/half_step/onset/' > c.csv
    run_it check cal.json c.csv
    expect_status 3
    expect_in "$err" "the onset, the calibration's the half_step"
    controls 379.0 2026-01-10 | sed 's/,control/,unknown/' > c.csv
    run_it check cal.json c.csv
    expect_status 3
    expect_in "$err" "there is no control sample"
}

@test "dates that are none are left out of the chart" {
    "$CHAINEND" fit --save cal.json -o fit.txt "$data/series/certified-mn.csv"
    controls 379.0 2026-02-30 379.3 11.2.2026 378.9 2024-02-29 > c.csv
    run_it check --format json cal.json c.csv
    expect_status 0
    [ "$(jq '.chart | length' out.txt)" = 1 ]
}

@test "a plan that is met, one that cannot be, and wrong wishes" {
    "$CHAINEND" fit --save cal.json -o fit.txt "$data/series/certified-mn.csv"
    run_it plan --at 10kg/mol --want 6% cal.json
    expect_status 0
    expect_in "$(head -n 1 out.txt)" "±6.0 % can be had"
    run_it plan --at 10kg/mol --want 6% --format json cal.json
    jq -e '.met and (.targets[0].then <= 0.06) and (.targets[0].now > 0.06) and (.steps | length > 0)' out.txt
    run_it plan --at 300kg/mol --want 5% cal.json
    expect_status 1
    expect_in "$out" "cannot be met" "even 12 runs of the unknown against a perfect calibration"
    run_it plan --want 5% cal.json
    expect_status 2
    run_it plan --at 10kg/mol cal.json
    expect_status 2
    run_it plan --at 10kg/mol --want 5% --within 0:5kg/mol cal.json
    expect_status 2
}
