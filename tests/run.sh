#!/bin/sh
# All tests, on a bare Debian machine too:   sh tests/run.sh [options of ctest, e.g. -R model]
#
# Installs what is missing, makes a Python environment, builds twice (gcc with warnings as errors; clang with address
# and undefined-behaviour sanitizers) and runs one ctest in each. Everything is left in build-tests/, where a second
# run is quick; LSTUB_TEST_DIR names another place.
set -eu
cd "$(dirname "$0")/.."
dir=${LSTUB_TEST_DIR:-build-tests}
mkdir -p "$dir"
dir=$(cd "$dir" && pwd)
jobs=$(getconf _NPROCESSORS_ONLN)

sh examples/install_packages.sh gcc g++ clang libclang-rt-dev binutils make cmake pkg-config check locales gzip \
    libexpat1-dev zlib1g-dev lua5.4 liblua5.4-dev python3 python3-venv python3-dev

python=$dir/venv/bin/python
[ -x "$python" ] || python3 -m venv "$dir/venv"
"$python" -m pip install --quiet --disable-pip-version-check \
    'numpy>=1.24' 'scipy>=1.10' 'matplotlib>=3.6' 'pytest>=7.2' 'setuptools>=64' wheel
"$python" -m pip install --quiet --disable-pip-version-check --force-reinstall --no-deps --no-build-isolation \
    ./bindings/python

configure() {   # folder, compiler, options
    folder=$1
    compiler=$2
    shift 2
    CC=$compiler CXX=$(echo "$compiler" | sed 's/gcc/g++/; s/clang/clang++/') \
        cmake -S . -B "$dir/$folder" -DLSTUB_BUILD_TESTS=ON -DLSTUB_BUILD_EXAMPLES=ON -DLSTUB_IPC2581=ON -DLSTUB_LUA=ON \
        "-DCMAKE_C_FLAGS=-Werror" "$@" >"$dir/$folder.configure.log" || { cat "$dir/$folder.configure.log"; exit 1; }
    cmake --build "$dir/$folder" --parallel "$jobs" >"$dir/$folder.build.log" 2>&1 || { cat "$dir/$folder.build.log"; exit 1; }
}
configure release gcc -DCMAKE_BUILD_TYPE=Release "-DLSTUB_TEST_PYTHON=$python"
configure sanitize clang -DCMAKE_BUILD_TYPE=RelWithDebInfo -DLSTUB_SANITIZE=address,undefined

# Both are run to the end, whatever fails in the first.
failed=0
for folder in release sanitize; do
    echo "== ctest, $folder"
    ctest --test-dir "$dir/$folder" --output-on-failure --no-tests=error --parallel "$jobs" "$@" || failed=1
done
exit $failed
