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
