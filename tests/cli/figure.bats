# SPDX-License-Identifier: GPL-3.0-or-later
load common

series() { printf '%s' "$SOURCE/examples/quellstein/series.csv"; }

controls() {
    printf '# construction: half_step\n# history: erased\nsample,role,mn (g/mol),tg (K),date\n'
    printf 'C,control,28400,358.0,2026-01-10\nC,control,28400,358.3,2026-02-11\n'
}

# png_size FILE: width and height from the header
png_size() { od -An -tu1 -j16 -N8 "$1" | awk '{ print ($1*16777216 + $2*65536 + $3*256 + $4) " " ($5*16777216 + $6*65536 + $7*256 + $8) }'; }

@test "every kind is drawn as SVG, PNG and PDF of the expected size" {
    "$CHAINEND" fit --save cal.json -o fit.txt "$(series)"
    controls > c.csv
    for kind in overlay contact calibration residuals influence relations range control; do
        case $kind in overlay|contact) file=$(series) ;; control) file="cal.json c.csv" ;; *) file=cal.json ;; esac
        for ending in svg png pdf; do
            # shellcheck disable=SC2086
            run_it figure --quiet "$kind" -o "$kind.gp" --picture "$kind.$ending" $file
            expect_status 0
            [ -z "$err" ]
        done
        [ "$(head -c 5 "$kind.pdf")" = "%PDF-" ]
        grep -q '<svg' "$kind.svg"
        width=1004
        [ "$kind" != contact ] || width=2008
        [ "$(png_size "$kind.png" | cut -d' ' -f1)" = $width ]
        [ "$(png_size "$kind.png" | cut -d' ' -f2)" -gt 300 ]
    done
    run_it figure run --picture run.png -o run.gp "$SOURCE/examples/quellstein/runs/Q5-1.txt"
    expect_status 0
    [ "$(png_size run.png)" = "1004 1255" ]
}

@test "the same input gives the same bytes in two runs and two folders" {
    "$CHAINEND" fit --save cal.json -o fit.txt "$(series)"
    mkdir elsewhere
    for kind in calibration residuals influence relations range; do
        "$CHAINEND" figure $kind -o a.gp --picture a.pdf cal.json
        "$CHAINEND" figure $kind --picture a.svg cal.json
        (cd elsewhere && "$CHAINEND" figure $kind -o a.gp --picture a.pdf ../cal.json && "$CHAINEND" figure $kind --picture a.svg ../cal.json)
        for f in a.gp a.svg a.pdf; do cmp $f elsewhere/$f; done
    done
}

@test "figures in characters, and none without gnuplot" {
    run_it figure calibration --terminal "$data/series/certified-mn.csv"
    expect_status 0
    expect_in "$out" "Mn / (kg/mol)" "1/Mn / (mol/kg)" "standards"
    ! LC_ALL=C grep -q "$(printf '\033')" out.txt
    PATH=/nonexistent "$CHAINEND" figure range --picture e.svg -o e.gp "$data/series/certified-mn.csv" 2> err.txt
    [ -s e.gp ]
    [ ! -e e.svg ]
    expect_in "$(cat err.txt)" "gnuplot is not installed" "e.gp"
}

@test "kinds and files that do not fit are refused" {
    run_it figure portrait "$data/series/certified-mn.csv"
    expect_status 2
    expect_in "$err" "is no kind of figure"
    run_it figure range a b
    expect_status 2
    run_it figure overlay "$data/series/certified-mn.csv"
    expect_status 3
    expect_in "$err" "names no run files"
    run_it figure control "$(series)"
    expect_status 3
    expect_in "$err" "has a date"
}

# A series whose every name tries to break out, and the runs it names.
hostile() {
    evil="'; system('touch pwned'); \`touch pwned\` \$(touch pwned) \"<script>alert(1)</script><img src=x onerror=alert(1)>]]> &amp; \\ \$x"
    long=$(head -c 10000 /dev/zero | tr '\0' 'A')
    csv=$(printf '%s' "$evil" | sed 's/"/""/g')
    printf '# polymer: %s %s\n# scope: </title></style><script>alert(2)</script>\n# history: erased\n# construction: half_step\n' "$evil" "$long"
    printf 'sample,role,mn (g/mol),mn_u (%%),tg (K),note\n'
    for mn in 2000:297 4000:343 9000:367 30000:381 200000:387; do
        printf '"%s %s",standard,%s,5,%s.1,"%s"\n' "$csv" "$mn" "${mn%%:*}" "${mn##*:}" "$csv"
        printf '"%s %s",standard,%s,5,%s.4,"%s"\n' "$csv" "$mn" "${mn%%:*}" "${mn##*:}" "$csv"
    done
    printf '"%s",left-out,9000,5,300,"%s"\n"\342\200\256%s",unknown,,,370,\n' "$csv" "$csv" "$csv"
}

@test "no text from a file breaks out of a script or of the page" {
    hostile > evil.csv
    for kind in calibration residuals influence; do
        run_it figure $kind --picture $kind.svg -o $kind.gp evil.csv
        expect_status 0
    done
    run_it report --quiet -o evil.html evil.csv
    expect_status 0
    [ ! -e pwned ]
    [ "$(grep -c '<script' evil.html)" = 0 ]
    ! grep -qi 'onerror=[^&]*>' evil.html || ! grep -q '<img src=x' evil.html
    tidy -q -e evil.html
    chromium --headless --no-sandbox --disable-gpu --dump-dom "file://$PWD/evil.html" > dom.html 2> /dev/null
    [ "$(grep -c '<script' dom.html)" = 0 ]
    # every picture of the page is one of ours
    ! grep -o '<img [^>]*src="[^"]\{0,20\}' dom.html | grep -v 'data:image/svg+xml' | grep -q .
    ! grep -q "$(printf '\342\200\256')" evil.html
}
