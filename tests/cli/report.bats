# SPDX-License-Identifier: GPL-3.0-or-later
load common

series() { printf '%s' "$SOURCE/examples/quellstein/series.csv"; }

@test "the page says the verdict first, is valid HTML, and needs nothing else" {
    run_it report -o page.html "$(series)"
    expect_status 0
    tidy -q -e page.html
    [ "$(grep -c '<script' page.html)" = 0 ]
    ! grep -oE '(src|href)="[^"]{0,24}' page.html | grep -v 'data:image/svg+xml' | grep -q .
    ! grep -q 'url(' page.html
    for words in "<h1>Molar mass from the glass transition" "Cautions" "Figures" "Working range" "Provenance" "SHA-256" \
        "Where the uncertainty comes from" "What the data say, and what they cannot" "Fieller" "Control samples"; do
        grep -q "$words" page.html || { echo "$words"; return 1; }
    done
    [ "$(grep -c '<img alt="' page.html)" = 6 ]
    [ "$(grep -c '<th scope="col">' page.html)" -gt 5 ]
    [ "$(grep -n 'X1</strong>' page.html | cut -d: -f1)" -lt "$(grep -n 'Cautions' page.html | head -n 1 | cut -d: -f1)" ]
}

@test "headless Chromium shows it without an error and without a request, and prints it on A4" {
    "$CHAINEND" report --quiet -o page.html "$(series)"
    chromium --headless --no-sandbox --disable-gpu --enable-logging=stderr --v=0 --dump-dom "file://$PWD/page.html" > dom.html 2> console.txt
    grep -q '</html>' dom.html
    ! grep -q 'CONSOLE' console.txt
    ! grep -oE 'https?://[a-z0-9.]+' page.html | grep -v 'www.w3.org' | grep -q .
    chromium --headless --no-sandbox --disable-gpu --no-pdf-header-footer --print-to-pdf=page.pdf "file://$PWD/page.html" 2> /dev/null
    pdfinfo page.pdf > info.txt
    grep -q 'A4' info.txt
    pages=$(sed -n 's/^Pages: *//p' info.txt)
    [ "$pages" -ge 6 ] && [ "$pages" -le 11 ]
    pdftotext page.pdf - | grep -q 'Mn = 4.67 kg/mol'
}

@test "the same input gives the same bytes; a record gives a page too" {
    cp -r "$SOURCE/examples/quellstein" s
    "$CHAINEND" report --quiet -o a.html s/series.csv
    "$CHAINEND" report --quiet s/series.csv > b.html
    cmp a.html b.html
    "$CHAINEND" fit --save cal.json -o fit.txt s/series.csv
    run_it report cal.json
    expect_status 0
    grep -q "named in the calibration record" out.txt
}

@test "without gnuplot the page says what is missing" {
    PATH=/nonexistent "$CHAINEND" report --quiet -o page.html "$data/series/certified-mn.csv"
    grep -q "gnuplot is not installed" page.html
    ! grep -q '<img' page.html
    run_it report -o no/such/page.html "$data/series/certified-mn.csv"
    expect_status 3
    run_it report
    expect_status 2
}
