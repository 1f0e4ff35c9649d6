# SPDX-License-Identifier: GPL-3.0-or-later
load common

# inverse TG MEAN_OF: the answer for one reading, ordinary fit
inverse() {
    run_it estimate --format json --scatter residuals --mean-of "$2" --tg "$1" "$data/series/exact-mn.csv"
    expect_status 0
}
bound() { [ "$(jq -r '.results[0].bound' out.txt)" = "$1" ]; }

# Fieller sets for the same numbers, computed independently (numpy), 95 %, 22 degrees of freedom.
@test "ordinary inverse sets: bounded" {
    inverse 330K 1
    bound two-sided
    close '.results[0].mn_g_mol' 3091.280745 1e-8
    close '.results[0].low_g_mol' 3005.174 1e-6
    close '.results[0].high_g_mol' 3181.972 1e-6
    inverse 384K 1
    close '.results[0].low_g_mol' 31065.061 1e-7
    close '.results[0].high_g_mol' 70921.394 1e-7
    inverse 370K 3
    close '.results[0].low_g_mol' 9397.5571 1e-7
    close '.results[0].high_g_mol' 10457.273 1e-7
    inverse 387K 3
    close '.results[0].low_g_mol' 83345.531 1e-7
    close '.results[0].high_g_mol' 1089358.3 1e-7
}

@test "ordinary inverse sets: one-sided on the plateau, empty above it" {
    inverse 388K 3
    bound lower-only
    close '.results[0].low_g_mol' 155024.51 1e-7
    [ "$(jq '.results[0].high_g_mol' out.txt)" = null ]
    inverse 390.5K 1
    bound above-plateau
    [ "$(jq -c '.results[0] | [.mn_g_mol, .low_g_mol, .high_g_mol]' out.txt)" = "[null,null,null]" ]
    close '.ceiling_tg_K' 386.5312111 1e-9
}

@test "a slope that is not significant determines nothing" {
    run_it estimate --format json --scatter residuals --mean-of 100000 --tg 387K "$data/series/flat.csv"
    [ "$status" -eq 2 ]
    run_it estimate --format json --scatter residuals --mean-of 1 --tg 387K "$data/series/flat.csv"
    expect_status 0
    bound undetermined
    run_it estimate --scatter residuals --tg 387K "$data/series/flat.csv"
    expect_in "$out" "not determined"
}

# The recommended method: York fit, Fieller, Welch-Satterthwaite; computed independently (numpy).
@test "with uncertain Mn the interval carries the certificates" {
    run_it estimate --format json --mean-of 3 --tg 330K --tg 387K --tg 388K "$data/series/certified-mn.csv"
    expect_status 0
    close '.results[0].low_g_mol' 2951.832 1e-6
    close '.results[0].high_g_mol' 3282.0915 1e-7
    close '.results[0].nu' 777.38546 1e-6
    close '.results[1].low_g_mol' 102418.28 1e-6
    close '.results[1].high_g_mol' 439199.95 1e-6
    close '.results[2].low_g_mol' 233348.42 1e-6
    [ "$(jq -r '.results[2].bound' out.txt)" = lower-only ]
}

# Textbook exercise of seven points: inverse sets of one reading.
@test "a published series of seven points" {
    run_it estimate --format json --tg 300K --tg 370K --tg 375K --tg 380K "$data/series/seven-points.csv"
    expect_status 0
    close '.results[0].mn_g_mol' 1249.8 5e-5
    close '.results[0].low_g_mol' 1190.4 5e-5
    close '.results[0].high_g_mol' 1315.1 5e-5
    close '.results[1].high_g_mol' 18544 5e-5
    close '.results[2].high_g_mol' 307029 5e-6
    [ "$(jq -r '.results[3].bound' out.txt)" = lower-only ]
    close '.results[3].low_g_mol' 28822 5e-5
}

@test "Tg from Mn with confidence and prediction interval" {
    run_it estimate --format json --mn 20kg/mol --scatter residuals "$data/series/exact-mn.csv"
    expect_status 0
    close '.results[0].tg_K' 379.17372999 1e-10
    close '.results[0].mean_low_K' 378.81912936 1e-9
    close '.results[0].mean_high_K' 379.52833062 1e-9
    close '.results[0].low_K' 377.55321046 1e-9
    close '.results[0].high_K' 380.79424952 1e-9
    run_it estimate --format json --mn 20000 --scatter residuals "$data/series/exact-mn.csv"
    close '.results[0].tg_K' 379.17372999 1e-10
}

@test "readings in every unit and with repeats and an uncertainty" {
    run_it estimate --format json --tg 56.85 --tg 134.33F --tg 330K --tg '329.9,330.1+-0.5K' --tg '330±0.5K' \
        "$data/series/certified-mn.csv"
    expect_status 0
    close '.results[1].tg_K' 330 1e-12
    close '.results[0].mn_g_mol' "$(jq '.results[2].mn_g_mol' out.txt)" 1e-10
    [ "$(jq '.results[3].readings' out.txt)" = 2 ]
    run_it estimate --tg 56.85 "$data/series/certified-mn.csv"
    expect_in "$out" "Readings without a unit were taken as °C." "an estimate for this polymer"
    for bad in 56,x 300K,301K 12m 1e999 -400 '330±-1K'; do
        run_it estimate --tg "$bad" "$data/series/certified-mn.csv"
        expect_status 2
        expect_in "$err" "--tg: "
    done
    run_it estimate --mn -5 "$data/series/certified-mn.csv"
    expect_status 2
}

@test "the unknowns of the series are answered when nothing else is asked" {
    run_it estimate "$data/series/certified-mn.csv"
    expect_status 0
    expect_in "$(sed -n 1p out.txt)" "X1  Mn = 10.0 kg/mol, 95 % interval 9.44 to 10.6 kg/mol"
    expect_in "$(sed -n 2p out.txt)" "X2  Mn > 142 kg/mol (95 %): this Tg cannot be told from the plateau"
    run_it estimate "$data/series/exact-mn.csv"
    expect_status 3
    expect_in "$err" "the series has no unknown: ask with --tg, --mn or a run file"
}

@test "a run that cannot be read costs its answer only" {
    run_it estimate "$data/series/certified-mn.csv" gone.csv --tg 330K
    expect_status 1
    expect_in "$err" "gone.csv: "
    expect_in "$out" "330K      Mn = 3.12 kg/mol"
}
