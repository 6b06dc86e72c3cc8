"""What the build says where it cannot be done."""

import os
import shutil
import subprocess
import sys

import pytest
from conftest import ROOT

pytest.importorskip("setuptools")
FOLDER = ROOT / "bindings" / "python"
pytestmark = pytest.mark.skipif(not FOLDER.is_dir(), reason="needs the checkout")


def build(folder, *arguments, **environment):
    done = subprocess.run(
        [sys.executable, "setup.py", *arguments], cwd=folder, capture_output=True, text=True, env={**os.environ, **environment}
    )
    return done.returncode, done.stdout + done.stderr


def test_without_the_library(tmp_path):
    copy = tmp_path / "a" / "b" / "python"
    shutil.copytree(FOLDER, copy, ignore=shutil.ignore_patterns("*.egg-info"))
    code, text = build(copy, "--version")
    assert code != 0 and "the C library is not beside this folder" in text and "pip install ./bindings/python" in text


@pytest.mark.skipif(sys.platform != "linux", reason="takes a compiler's option")
def test_without_headers(tmp_path):
    code, text = build(FOLDER, "build_ext", "--build-lib", str(tmp_path), "--build-temp", str(tmp_path), CC="cc -nostdinc")
    assert code != 0 and "needs the headers of expat and zlib" in text and "libexpat1-dev zlib1g-dev" in text


def test_no_source_distribution(tmp_path):
    code, text = build(FOLDER, "egg_info", "--egg-base", str(tmp_path), "sdist", "--dist-dir", str(tmp_path))
    assert code != 0 and "no source distribution is offered" in text and not list(tmp_path.glob("*.tar*"))
