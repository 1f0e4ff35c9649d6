# SPDX-License-Identifier: GPL-3.0-or-later
# Loaded by every bats file. run_it ARGS...: standard output in $out, standard error in $err, exit status in $status.
: "${CHAINEND:?the program under test}" "${SOURCE:?the top of the source tree}"

setup() {
    cd "$BATS_TEST_TMPDIR" || exit 1
    data=$SOURCE/tests/data
}

run_it() {
    status=0
    "$CHAINEND" "$@" > out.txt 2> err.txt < /dev/null || status=$?
    out=$(cat out.txt)
    err=$(cat err.txt)
}

# expect_status N: with what was said when it is another
expect_status() {
    [ "$status" -eq "$1" ] || { printf 'status %s, expected %s\n%s\n%s\n' "$status" "$1" "$out" "$err"; return 1; }
}

# expect_in TEXT WANTED...: every WANTED stands in TEXT
expect_in() {
    local text=$1
    shift
    for wanted in "$@"; do
        case $text in *"$wanted"*) ;; *) printf 'not found: %s\nin:\n%s\n' "$wanted" "$text"; return 1 ;; esac
    done
}

# close JQ-FILTER VALUE REL: the number of out.txt agrees within REL relative
close() {
    jq -e --argjson want "$2" --argjson rel "$3" \
        "($1) as \$x | ((\$x - \$want) | fabs) <= \$rel * (\$want | fabs)" out.txt > /dev/null ||
        { printf '%s is %s, expected %s within %s\n' "$1" "$(jq "$1" out.txt)" "$2" "$3"; return 1; }
}
