# SPDX-License-Identifier: GPL-3.0-or-later
load common

# Ordinary least squares on the 24 runs, as R 4.2.2 (lm) and numpy compute it for the same numbers.
@test "scatter from residuals is ordinary least squares, to eight digits" {
    run_it fit --format json --scatter residuals "$data/series/exact-mn.csv"
    expect_status 0
    [ "$(jq -r .schema out.txt)" = "chainend.fit/1" ]
    close '.parameters[0].value' 388.16375474 1e-10
    close '.parameters[1].value' 179800.49511 1e-10
    close '.parameters[0].u' 0.19578137537 1e-9
    close '.parameters[1].u' 959.45442398 1e-9
    close '.covariance[0][1]' 113.95950408 1e-9
    close '.covariance[1][0]' 113.95950408 1e-9
    close '.residual_sd_K' 0.76246081866 1e-9
    close '.dof' 22 0
    close '.parameters[0].low' 387.75772902 1e-10
    close '.parameters[0].high' 388.56978047 1e-10
    close '.parameters[1].low' 177810.70842 1e-10
    close '.parameters[1].high' 181790.2818 1e-10
    close '.lack_of_fit.F' 1.0484930259 1e-8
    close '.lack_of_fit.p' 0.43156178833 1e-8
    close '.curvature.F' 2.777157162 1e-8
}

# York et al., Am. J. Phys. 72 (2004) 367, on the sample means; computed independently with numpy.
@test "by default Mn errors count: York regression on the sample means" {
    run_it fit --format json "$data/series/certified-mn.csv"
    expect_status 0
    close '.parameters[0].value' 388.097441455 1e-11
    close '.parameters[1].value' 181094.913516 1e-10
    close '.parameters[0].u' 0.1718367308 1e-9
    close '.parameters[1].u' 5062.003324 1e-9
    close '.covariance[0][1]' 447.2343988 1e-8
    close '.chi2' 7.1747580787 1e-9
    close '.run_sd_K' 0.4840497564 1e-9
    [ "$(jq -r .scatter out.txt)" = repeats ]
}

# Textbook exercise (seven M, Tg pairs); ordinary least squares in 1/M, 5 degrees of freedom.
@test "a published series of seven points, with a warning that nothing but the residuals tells the scatter" {
    run_it fit --format json "$data/series/seven-points.csv"
    expect_status 0
    close '.parameters[0].value' 379.39157 1e-7
    close '.parameters[1].value' 99223.275 1e-8
    close '.parameters[0].u' 0.692 1e-3
    close '.parameters[1].u' 806.9 1e-4
    close '.parameters[0].high - .parameters[0].value' 1.7779 1e-4
    close '.parameters[1].high - .parameters[1].value' 2074.219 1e-5
    close '.residual_sd_K' 1.424356 1e-6
    [ "$(jq -r .scatter out.txt)" = residuals ]
    expect_in "$(jq -r '.warnings[]' out.txt)" "one run per standard and no stated uncertainty"
}

@test "text says the verdict first" {
    run_it fit "$data/series/certified-mn.csv"
    expect_status 0
    expect_in "$(head -n 2 out.txt)" "Tg = Tg_inf - K/Mn" "fitted to 8 standards (24 runs)"
    expect_in "$out" "388.10 K" "181095 K g/mol" "One run of an unknown bounds Mn from above up to 113.9 °C"
    [ "$(awk '{ gsub(/[^ -~]/, "x") } length > 124' out.txt | wc -l)" = 0 ]
}

@test "series that cannot be fitted are refused with the reason" {
    printf '# construction: half_step\nsample,mn (g/mol),tg (K)\nA,2000,300\nB,8000,366\n' > two.csv
    run_it fit two.csv
    expect_status 3
    expect_in "$err" "two.csv: "
    [ "$(wc -l < err.txt)" = 1 ]
    printf '# construction: half_step\nsample,mn (g/mol),tg (K)\nA,8000,365\nB,8000,366\nC,8000,367\nD,8000,366\n' > same.csv
    run_it fit same.csv
    expect_status 3
    expect_in "$err" "same.csv: "
    [ -z "$out" ]
}

@test "options are checked" {
    run_it fit --relation fox "$data/series/exact-mn.csv"
    expect_status 2
    expect_in "$err" "--relation: 'fox' is none of flory-fox"
    run_it fit --level 1.5 "$data/series/exact-mn.csv"
    expect_status 2
    expect_in "$err" "--level: '1.5' is not a number between 0 and 1"
    run_it fit --scatter guess "$data/series/exact-mn.csv"
    expect_status 2
    run_it fit a.csv b.csv
    expect_status 2
}

@test "output to a file arrives whole or not at all" {
    run_it fit --format csv -o fit.csv "$data/series/exact-mn.csv"
    expect_status 0
    [ -z "$out" ]
    [ "$(head -n 1 fit.csv | cut -d, -f1-4)" = "kind,name,unit,value" ]
    [ "$(ls)" = "$(printf 'err.txt\nfit.csv\nout.txt')" ]
    run_it fit -o nowhere/fit.csv "$data/series/exact-mn.csv"
    expect_status 3
    expect_in "$err" "nowhere/fit.csv: cannot write"
    "$CHAINEND" fit "$data/series/exact-mn.csv" > /dev/full 2> err.txt && return 1
    expect_in "$(cat err.txt)" "cannot write standard output"
}

@test "the same digits in a locale with a decimal comma" {
    run_it fit --format json "$data/series/exact-mn.csv"
    cp out.txt plain.txt
    localedef -i de_DE -f UTF-8 "$PWD/de_DE.UTF-8"
    LOCPATH=$PWD LC_ALL=de_DE.UTF-8 "$CHAINEND" fit --format json "$data/series/exact-mn.csv" > comma.txt
    cmp plain.txt comma.txt
}

# Slope and its uncertainty: analysis of covariance with one slope, computed with numpy for the same numbers.
@test "mixed heating rates are refused, or reduced to one when asked" {
    run_it fit "$data/series/mixed-rates.csv"
    expect_status 3
    expect_in "$err" "mixed-rates.csv:6: this row was measured at 20 K/min" "--reduce-to"
    run_it fit --reduce-to 10K/min --format json "$data/series/mixed-rates.csv"
    expect_status 0
    close .rate_reduction.slope_K_decade 4.152410118609179 1e-9
    close .rate_reduction.u_K_decade 0.696247690664298 1e-9
    close .rate_reduction.nu 7 0
    close .run_nu 7 0
    close .rate_K_min 10 0
    jq -e '.parameters[0].u_common > 0.05' out.txt
    # the same from a line in the file
    sed 's/^# history/# reduce_to: 10 K\/min\n# history/' "$data/series/mixed-rates.csv" > line.csv
    "$CHAINEND" fit --format json line.csv | cmp - out.txt
    run_it series --reduce-to 10K/min --format csv "$data/series/mixed-rates.csv"
    expect_status 0
    [ "$(head -n 1 out.txt | sed 's/.*,//')" = reduced_K ]
    awk -F, 'NR > 1 { if ($12 == 10 && $NF != 0) exit 1; if ($12 == 20 && !($NF > 1)) exit 1 }' out.txt
}

@test "a rate that is not known cannot be reduced" {
    sed 's/, 20$/,/; s/, 40$/,/' "$data/series/mixed-rates.csv" > hole.csv
    run_it fit --reduce-to 20K/min hole.csv
    expect_status 3
    expect_in "$err" "its heating rate is not known" "hole.csv:6"
}

@test "resampling is a diagnostic that the seed makes reproducible" {
    run_it fit --resamples 500 --seed 7 --format json "$data/series/certified-mn.csv"
    expect_status 0
    cp out.txt first.txt
    run_it fit --resamples 500 --seed 7 --format json "$data/series/certified-mn.csv"
    cmp out.txt first.txt
    [ "$(jq .resampled.n out.txt)" = 500 ]
    jq -e '.resampled.parameters[0] | .bca_low < .bca_high' out.txt
    run_it fit --resamples 500 --seed 8 --format json "$data/series/certified-mn.csv"
    ! cmp -s out.txt first.txt
    run_it fit --seed x "$data/series/certified-mn.csv"
    expect_status 2
    expect_in "$err" "--seed"
}

# Paule-Mandel on the York sums of the frozen series: r = 0.05827751445 (computed with numpy and SciPy).
@test "excess scatter in Mn can be asked for, or turned off" {
    run_it fit --excess multiplicative --format json "$data/series/certified-mn.csv"
    expect_status 0
    close .excess.r 0.05827751445 1e-8
    [ "$(jq -r .excess.model out.txt)" = multiplicative ]
    run_it fit --excess none --format json "$data/series/certified-mn.csv"
    close .excess.r 0 0
    run_it fit --excess some "$data/series/certified-mn.csv"
    expect_status 2
}

@test "the uncertainty of the temperature scale is carried as common" {
    run_it fit --tg-common-u 0.3 --format json "$data/series/certified-mn.csv"
    expect_status 0
    close '.parameters[0].u_common' 0.3 1e-9
    jq -e '.parameters[1].u_common < 1e-6' out.txt
}
