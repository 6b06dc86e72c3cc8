#!/bin/sh
# The benchmark: sh tests/bench/run.sh [OUT.json]. A table on the terminal, and as JSON where asked for. Not a test: it
# passes no judgement and is not part of tests/run.sh. BOARD=file measures the reader on another board.
set -eu
root=$(CDPATH= cd -- "$(dirname -- "$0")/../.." && pwd)
out=${1:+$(cd -- "$(dirname -- "$1")" && pwd)/$(basename -- "$1")}
build=$root/build/bench
mkdir -p "$build"
sh "$root/examples/install_packages.sh" gcc cmake make libexpat1-dev zlib1g-dev python3 python3-venv valgrind >&2
cmake -S "$root" -B "$build" -DCMAKE_BUILD_TYPE=Release -DBUILD_SHARED_LIBS=OFF -DLSTUB_BUILD_TESTS=OFF \
    -DLSTUB_BUILD_EXAMPLES=OFF >"$build/cmake.log"
cmake --build "$build" -j 2 >"$build/build.log"
cc -O2 -std=c99 -I"$root/libstub/include" "$root"/tests/bench/*.c -o "$build/bench" "$build/libstub_ipc2581.a" \
    "$build/libstub.a" -lexpat -lz -lm
[ -x "$build/venv/bin/python" ] || python3 -m venv "$build/venv"
"$build/venv/bin/python" -c "import numpy, scipy, skrf" 2>/dev/null || "$build/venv/bin/pip" install -q numpy scipy scikit-rf
board=${BOARD:-$root/../shared/boards/testcase10.xml.gz}
[ -r "$board" ] || board=$root/examples/data/demo_board.xml.gz
"$build/venv/bin/python" "$root/tests/bench/bench.py" "$build/bench" "$board" "$build" ${out:+"$out"}
