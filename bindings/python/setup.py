"""Builds the extension from this folder and the C library two folders up, in one abi3 module for CPython >= 3.11.

A wheel holds everything. A source distribution is not offered: it would need a second copy of the library.
"""

import atexit
import glob
import os
import re
import shutil
import subprocess
import sys
import sysconfig
import tempfile

from setuptools import Extension, setup
from setuptools.command.build_ext import build_ext
from setuptools.command.sdist import sdist

HERE = os.path.dirname(os.path.abspath(__file__))
LIBRARY = os.path.normpath(os.path.join(HERE, "..", "..", "libstub"))
PARTS = "base num material network touchstone measure stackup via model criteria plan ipc2581".split()
FLAGS = ["-std=c99", "-O2", "-fvisibility=hidden", "-ffp-contract=off"]
LINK = ["-Wl,--version-script=" + os.path.join(HERE, "src", "exports.map")] if sys.platform == "linux" else []


def version():
    header = os.path.join(LIBRARY, "include", "libstub.h")
    if not os.path.exists(header):
        raise SystemExit(
            "libstub: the C library is not beside this folder (../../libstub/include/libstub.h is missing). "
            "Install from a checkout of the project: pip install ./bindings/python"
        )
    with open(header, encoding="utf-8") as file:
        return re.search(r'#define LSTUB_VERSION "([^"]+)"', file.read()).group(1)


class BuildExtension(build_ext):
    def build_extension(self, extension):
        self.need_headers()
        for part in PARTS:  # absolute, so that the objects stay in the build folder
            extension.sources += sorted(glob.glob(os.path.join(LIBRARY, part, "*.c")))
        super().build_extension(extension)

    def need_headers(self):
        with tempfile.TemporaryDirectory() as folder:
            source = os.path.join(folder, "headers.c")
            with open(source, "w", encoding="ascii") as file:
                file.write("#include <expat.h>\n#include <zlib.h>\n")
            compiler = self.compiler.compiler
            missing = subprocess.run([*compiler, "-E", source], capture_output=True).returncode != 0
        if missing:
            raise SystemExit(
                "libstub: the board reader needs the headers of expat and zlib "
                "(Debian: apt-get install libexpat1-dev zlib1g-dev)"
            )


class NoSdist(sdist):
    def run(self):
        raise SystemExit("libstub: no source distribution is offered; use pip wheel ./bindings/python")


if sysconfig.get_config_var("Py_GIL_DISABLED"):
    raise SystemExit("libstub: needs a CPython with the stable ABI; free-threaded builds have none")

# A fresh build folder outside the checkout: nothing stale, nothing left, two builds at once do not meet.
build = tempfile.mkdtemp(prefix="libstub-build-")
atexit.register(shutil.rmtree, build, ignore_errors=True)

setup(
    version=version(),
    ext_modules=[
        Extension(
            "libstub._core",
            sources=sorted(os.path.relpath(path, HERE) for path in glob.glob(os.path.join(HERE, "src", "*.c"))),
            include_dirs=[os.path.join(LIBRARY, "include"), LIBRARY],
            libraries=["expat", "z", "m"],
            extra_compile_args=FLAGS,
            extra_link_args=LINK,
            py_limited_api=True,
        )
    ],
    cmdclass={"build_ext": BuildExtension, "sdist": NoSdist},
    options={"bdist_wheel": {"py_limited_api": "cp311"}, "build": {"build_base": build}},
)
