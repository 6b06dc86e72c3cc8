#!/bin/sh
# All tests, on a bare Debian machine too:   sh tests/run.sh [options of ctest, e.g. -R model]
#
# Installs what is missing, makes a Python environment, builds twice (gcc; clang with address and undefined-behaviour
# sanitizers; warnings are errors) and runs one ctest in each. One suite runs under the thread sanitizer, too. Everything
# is left in build-tests/, where a second run is quick; LSTUB_TEST_DIR names another place.
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
    'numpy>=1.24' 'scipy>=1.10' 'matplotlib>=3.6' 'scikit-rf>=1.0' 'pytest>=7.2' 'setuptools>=64' wheel
binding() {     # options of pip: the Python binding as it is now
    "$python" -m pip install --quiet --disable-pip-version-check --no-deps --no-build-isolation "$@" ./bindings/python
}
binding --force-reinstall
rm -rf "$dir/python-sanitize"
CC=clang LDSHARED="clang -shared" CFLAGS="-g -fsanitize=address,undefined -fno-sanitize-recover=all" \
    LDFLAGS="-fsanitize=address,undefined -shared-libasan" binding --target "$dir/python-sanitize"

configure() {   # folder, compiler, target, options
    folder=$1
    compiler=$2
    target=$3
    shift 3
    CC=$compiler CXX=$(echo "$compiler" | sed 's/gcc/g++/; s/clang/clang++/') \
        cmake -S . -B "$dir/$folder" -DLSTUB_BUILD_TESTS=ON -DLSTUB_BUILD_EXAMPLES=ON -DLSTUB_IPC2581=ON -DLSTUB_LUA=ON \
        -DCMAKE_C_FLAGS=-Werror "$@" >"$dir/$folder.log" 2>&1 &&
        cmake --build "$dir/$folder" --target "$target" --parallel "$jobs" >>"$dir/$folder.log" 2>&1 ||
        { cat "$dir/$folder.log"; exit 1; }
}
configure release gcc all -DCMAKE_BUILD_TYPE=Release "-DLSTUB_TEST_PYTHON=$python"
configure sanitize clang all -DCMAKE_BUILD_TYPE=RelWithDebInfo -DLSTUB_SANITIZE=address,undefined \
    "-DLSTUB_TEST_PYTHON=$python" "-DLSTUB_TEST_PYTHONPATH=$dir/python-sanitize"
configure threads clang check_threads -DCMAKE_BUILD_TYPE=RelWithDebInfo -DLSTUB_SANITIZE=thread

# Each is run to the end, whatever fails in the others. Options may name tests that only one of them has.
failed=0
none=error
[ $# -eq 0 ] || none=ignore
echo "== shared handles, thread sanitizer"
CK_FORK=no "$dir/threads/tests/check_threads" || failed=1
for folder in release sanitize; do
    echo "== ctest, $folder"
    ctest --test-dir "$dir/$folder" --output-on-failure --no-tests=$none --parallel "$jobs" "$@" || failed=1
done
exit $failed
