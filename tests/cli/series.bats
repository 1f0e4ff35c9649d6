# SPDX-License-Identifier: GPL-3.0-or-later
load common

@test "series shows the pairs and the pooled repeatability" {
    run_it series "$data/series/certified-mn.csv"
    expect_status 0
    expect_in "$out" "8 standards to fit, 10 samples and 28 measurements in all" "history erased" \
        "S1      standard    1.93    5.0     3    25.25  0.28  0.55" "s.d. of one run 0.48 K" "16 degrees of freedom"
    [ -z "$err" ]
}

@test "series as CSV and JSON holds kelvin in full" {
    run_it series --format csv "$data/series/certified-mn.csv"
    expect_status 0
    [ "$(head -n 1 out.txt | cut -d, -f1-4)" = "line,sample,role,mn_g_mol" ]
    [ "$(sed -n 2p out.txt)" = "6,S1,standard,1930,96.5,,2,,297.78,,half_step,10,,,yes,,,,0" ]
    run_it series --format json "$data/series/certified-mn.csv"
    [ "$(jq -r .schema out.txt)" = "chainend.series/1" ]
    close .run_sd_K 0.4840497564 1e-9
    [ "$(jq '[.samples[] | select(.role == "unknown")] | length' out.txt)" = 2 ]
}

@test "every fault of a series file is told at once, with its line, and the rest goes on" {
    cat > s.csv <<'X'
# construction: half_step
# rate: 10 K/min
sample, role,     mn (g/mol), mn_u (%), tg (K)
A,      standard, 2000,       5,        297.1
B,      standard, ,           5,        343.7
C,      standard, 0,          5,        366.3
D,      standard, -8000,      5,        376.5
E,      standerd, 35000,      5,        382.8
F,      standard, 70000,      5,        385,9
G,      standard, 150000,     5,        385.5
H,      standard, 300000,     -5,       387.3
,       standard, 300000,     5,        387.3
X,      unknown,  ,           ,         
X
    sed -i 's/385,9$/385.9x/' s.csv
    run_it series s.csv
    expect_status 1
    expect_in "$err" "s.csv:5:3: standard 'B' has no Mn" "s.csv:6:3: mn is 0: it must be above zero" \
        "s.csv:7:3: mn is -8000" "s.csv:8:2: role 'standerd' is none of standard, unknown, control, left-out" \
        "s.csv:9:5: " "s.csv:11:4: mn_u is -5" "s.csv:12:1: the row names no sample" \
        "s.csv:13" "neither a run nor a tg"
    expect_in "$out" "2 standards to fit"
}

@test "a series that mixes or contradicts itself is refused whole" {
    printf '# construction: half_step\nsample,mn (g/mol),tg (K)\nA,2000,300\nA,3000,301\n' > s.csv
    run_it series s.csv
    expect_status 3
    expect_in "$err" "s.csv:4: sample 'A' has another mn here than in line 3" "cannot be used until"
    printf 'sample,mn (g/mol),tg (K),rate (K/min)\nA,2000,300,10\nB,3000,301,20\n' > s.csv
    run_it series s.csv
    expect_status 3
    expect_in "$err" "s.csv:3: this row was measured at 20 K/min, the series at 10 K/min"
    printf 'sample,mn (g/mol),mw (g/mol),dispersity,tg (K)\nA,2000,1500,,300\nB,2000,,0.9,300\nC,2000,3000,1.5,300\n' > s.csv
    run_it series s.csv
    expect_status 1
    expect_in "$err" "s.csv:2:3: Mn is larger than Mw" "s.csv:3:4: dispersity is 0.9: Mw/Mn cannot be below 1"
}

@test "a unit that would be a guess is demanded" {
    printf 'sample,mn,tg (K)\nA,2000,300\n' > s.csv
    run_it series s.csv
    expect_status 3
    expect_in "$err" "s.csv:1:2: column 'mn' has no unit: write 'mn (g/mol)' or 'mn (kg/mol)'"
    printf 'sample,mn (g/mol),tg\nA,2000,300\n' > s.csv
    run_it series s.csv
    expect_status 3
    expect_in "$err" "s.csv:1:3: column 'tg' has no unit"
    printf 'sample;mn (kg/mol);tg (°C)\nA;2,5;26,85\n' > s.csv
    run_it series --format json s.csv
    expect_status 0
    close '.samples[0].mn_g_mol' 2500 1e-12
    close '.samples[0].mean_tg_K' 300 1e-12
}

@test "missing, empty and non-table files each end in one line" {
    run_it series nowhere.csv
    expect_status 3
    [ "$(wc -l < err.txt)" = 1 ]
    expect_in "$err" "nowhere.csv: " "No such file"
    : > empty.csv
    run_it series empty.csv
    expect_status 3
    expect_in "$err" "empty.csv"
    echo 'Dear colleague, please find the samples in the fridge.' > letter.csv
    run_it series letter.csv
    expect_status 3
    expect_in "$err" "letter.csv:1: there is no column 'sample'"
    run_it series .
    expect_status 3
}

@test "an unreadable run costs its row only" {
    printf '# construction: half_step\nsample,mn (g/mol),run,tg (K)\nA,2000,gone.csv,\nB,3000,,301\n' > s.csv
    run_it series s.csv
    expect_status 1
    expect_in "$err" "s.csv:3: sample 'A' left out: gone.csv: "
    expect_in "$out" "1 standard to fit" "left out: gone.csv"
}

@test "usage mistakes exit with 2 and say what to do" {
    run_it series
    expect_status 2
    expect_in "$err" "one series file must be named" "see 'chainend series --help'"
    run_it series --form json x.csv
    expect_status 2
    expect_in "$err" "unknown option '--form' (options are written out: '--format')"
    run_it series --format xml x.csv
    expect_status 2
    expect_in "$err" "--format: 'xml' is none of text, csv, json"
    run_it nonsense
    expect_status 2
    run_it
    expect_status 2
    run_it --help
    expect_status 0
    expect_in "$out" "commands:" "estimate"
}
