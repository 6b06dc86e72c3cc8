#!/bin/sh
# Installs a build into a folder and uses it from another program in every way there is:
#     check_consumers.sh ROOT BUILD CC
set -eu
root=$1
build=$2
cc=$3
work=$build/consumers
rm -rf "$work"
mkdir -p "$work"

echo "== install, moved elsewhere afterwards"
cmake --install "$build" --prefix "$work/first" >/dev/null
mv "$work/first" "$work/stage"
lib=$(dirname "$(find "$work/stage" -name libstub.so.0)")

echo "== find_package"
cmake -S "$root/tests/consumer" -B "$work/find" "-DCMAKE_PREFIX_PATH=$work/stage" >/dev/null
cmake --build "$work/find" >/dev/null
"$work/find/consumer"

echo "== pkg-config"
export PKG_CONFIG_PATH="$lib/pkgconfig"
# shellcheck disable=SC2046
"$cc" "$root/tests/consumer/main.c" $(pkg-config --cflags --libs libstub_ipc2581 libstub) -o "$work/by_pkg_config"
LD_LIBRARY_PATH=$lib "$work/by_pkg_config"

for shared in ON OFF; do
    echo "== add_subdirectory, BUILD_SHARED_LIBS=$shared"
    cmake -S "$root/tests/consumer" -B "$work/sub_$shared" "-DLIBSTUB_SOURCE=$root" -DBUILD_SHARED_LIBS=$shared >/dev/null
    cmake --build "$work/sub_$shared" >/dev/null
    "$work/sub_$shared/consumer"
done

echo "== installed static libraries"
cmake -S "$root" -B "$work/static" -DBUILD_SHARED_LIBS=OFF -DLSTUB_BUILD_TESTS=OFF -DLSTUB_BUILD_EXAMPLES=OFF >/dev/null
cmake --build "$work/static" >/dev/null
cmake --install "$work/static" --prefix "$work/static_stage" >/dev/null
cmake -S "$root/tests/consumer" -B "$work/find_static" "-DCMAKE_PREFIX_PATH=$work/static_stage" >/dev/null
cmake --build "$work/find_static" >/dev/null
"$work/find_static/consumer"
export PKG_CONFIG_PATH="$(dirname "$(find "$work/static_stage" -name libstub.a)")/pkgconfig"
# shellcheck disable=SC2046
"$cc" "$root/tests/consumer/main.c" $(pkg-config --static --cflags --libs libstub_ipc2581 libstub) -o "$work/static_by_pkg_config"
"$work/static_by_pkg_config"
