#!/bin/sh
# The main job: from a board file to a back-drill plan.
#
#     sh examples/run.sh [BOARD.xml[.gz] [OUTDIR]]
#
# Without a board: the invented one in examples/data. Results go to OUTDIR, else to out/ beside this checkout's README.
# The rules (which net carries which signal, what the fabricator can do) are those named by LSTUB_RULES, else those that
# examples/data has for the board, else examples/data/generic_rules.txt.
# Installs what is missing to build (Debian), builds in build/examples, plans. Exit 0: done, 1: an error, named.
# Without a board, three more examples follow on the demo board's stackup: via_sparameters, and where Lua 5.4 is or can be
# installed measured_coupon and pair_skew. What they print goes to out/NAME.txt.
set -eu

usage() {
    echo "usage: sh run.sh [BOARD.xml[.gz] [OUTDIR]]     (environment: LSTUB_RULES=RULES.txt)"
}
fail() {
    echo "run.sh: $*" >&2
    exit 1
}
case "${1-}" in
    -h | --help) usage; exit 0 ;;
    -*) usage >&2; exit 1 ;;
esac
if [ $# -gt 2 ]; then
    usage >&2
    exit 1
fi

# The caller's folder stays the current one, so that relative paths mean what the caller means.
here=$(CDPATH='' cd -- "$(dirname -- "$0")" && pwd)
root=$(dirname -- "$here")
board=${1-$here/data/demo_board.xml.gz}
out=${2-$root/out}
name=$(basename -- "$board")
case $name in
    demo_board.xml*) rules=$here/data/demo_rules.txt ;;
    testcase10.xml*) rules=$here/data/testcase10_rules.txt ;;
    *) rules=$here/data/generic_rules.txt ;;
esac
rules=${LSTUB_RULES:-$rules}
[ -n "$out" ] || fail "OUTDIR is empty"
[ -f "$board" ] || fail "no such board file: '$board'"
[ -f "$rules" ] || fail "no such rules file: '$rules'"
mkdir -p -- "$out" || fail "cannot make the folder '$out'"
for output in plan.csv drill_table.csv "backdrilled_$name"; do    # also where a link leads there
    for input in "$board" "$rules"; do
        [ ! "$out/$output" -ef "$input" ] || fail "'$out/$output' is an input, '$input': it would be overwritten"
    done
done

sh "$here/install_packages.sh" gcc libc6-dev make cmake libexpat1-dev zlib1g-dev

build=$root/build/examples
log=$build.log
mkdir -p "$root/build" || fail "cannot make the folder '$root/build'"
configure() {
    cmake -S "$root" -B "$build" -DCMAKE_BUILD_TYPE=Release -DLSTUB_IPC2581=ON -DLSTUB_BUILD_EXAMPLES=ON \
        -DLSTUB_BUILD_TESTS=OFF "$@" >"$log" 2>&1
}
echo "building in $build" >&2
if ! configure -DLSTUB_LUA=OFF; then       # a cache from another place or another compiler: once more from nothing
    rm -rf "$build"
    configure -DLSTUB_LUA=OFF || { cat "$log" >&2; fail "cmake cannot configure the build"; }
fi
cmake --build "$build" --parallel --target board_plan >"$log" 2>&1 || { cat "$log" >&2; fail "the build failed"; }

"$build/examples/board_plan" "$board" "$rules" "$out"
[ $# -eq 0 ] || exit 0

example() {     # name, command: what it prints goes to a file, and so do its networks
    name=$1
    shift
    echo "$name: see $out/$name.txt" >&2
    "$@" "$board" "$out" >"$out/$name.txt" || fail "$name failed"
}
cmake --build "$build" --parallel --target via_sparameters >"$log" 2>&1 || { cat "$log" >&2; fail "the build failed"; }
example via_sparameters "$build/examples/via_sparameters"
if sh "$here/install_packages.sh" lua5.4 liblua5.4-dev && configure -DLSTUB_LUA=ON &&
    cmake --build "$build" --parallel --target lua_libstub >"$log" 2>&1; then
    export LUA_CPATH="$build/bindings/lua/?.so" LUA_PATH="$here/lua/?.lua"
    example measured_coupon lua5.4 "$here/lua/measured_coupon.lua"
    example pair_skew lua5.4 "$here/lua/pair_skew.lua"
else
    echo "not run: measured_coupon and pair_skew, which need Lua 5.4 here" >&2
fi
