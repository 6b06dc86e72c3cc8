"""The package as a whole: names, documentation, stubs, coverage of the header, what the extension exports."""

import ast
import dataclasses
import doctest
import importlib
import inspect
import pkgutil
import re
import shutil
import subprocess
import sys
from pathlib import Path

import pytest
from conftest import ROOT

import libstub as ls
from libstub import _core

PACKAGE = Path(ls.__file__).parent
MODULES = [importlib.import_module(f"libstub.{m.name}") for m in pkgutil.iter_modules([str(PACKAGE)]) if m.name != "_core"]


def header(name):
    return (ROOT / "libstub" / "include" / name).read_text(encoding="utf-8")


# ---- names and documentation ------------------------------------------------------------------------


def test_all_names_exist_and_are_all():
    assert len(set(ls.__all__)) == len(ls.__all__)
    public = {name for name in vars(ls) if not name.startswith("_") and name not in ("annotations",)}
    assert public == set(ls.__all__)


def public_parts():
    for name in ls.__all__:
        thing = getattr(ls, name)
        if inspect.isclass(thing) or inspect.isfunction(thing):
            yield name, thing
        if inspect.isclass(thing):
            for part, value in vars(thing).items():
                if not part.startswith("_") and (inspect.isfunction(value) or isinstance(value, (property, classmethod))):
                    yield f"{name}.{part}", value


@pytest.mark.parametrize("name, thing", list(public_parts()), ids=lambda value: value if isinstance(value, str) else "")
def test_everything_public_is_documented(name, thing):
    doc = inspect.getdoc(thing.fget if isinstance(thing, property) else getattr(thing, "__func__", thing))
    assert doc and not doc.startswith(f"{name}("), f"{name} has no docstring of its own"


def test_functions_document_every_parameter():
    missing = []
    for name, thing in public_parts():
        if not inspect.isfunction(thing) or name.split(".")[-1] in ls.units.__all__ or name.split(".")[-1] == "of":
            continue
        parameters = set(inspect.signature(thing).parameters) - {"self", "changes"}
        if len(parameters) > 1:
            missing += [f"{name}: {p}" for p in parameters if not re.search(rf"\b{p}\b", thing.__doc__)]
    assert missing == []


@pytest.mark.parametrize("module", [ls, *MODULES], ids=lambda module: module.__name__)
def test_examples_in_docstrings(module):
    names = {name: getattr(ls, name) for name in ls.__all__}
    result = doctest.testmod(module, extraglobs=names)
    assert result.failed == 0


def test_there_are_examples_in_docstrings():
    assert sum(len(t.examples) for m in MODULES for t in doctest.DocTestFinder().find(m)) >= 15


# ---- types ------------------------------------------------------------------------------------------


def test_stub_and_extension_have_the_same_names():
    tree = ast.parse((PACKAGE / "_core.pyi").read_text(encoding="utf-8"))
    stub = set()
    for node in tree.body:
        if isinstance(node, (ast.FunctionDef, ast.ClassDef)):
            stub.add(node.name)
        elif isinstance(node, ast.AnnAssign):
            stub.add(node.target.id)
    assert stub == {name for name in dir(_core) if not name.startswith("__")}
    for node in tree.body:
        if isinstance(node, ast.ClassDef):
            own = {n.name for n in node.body if isinstance(n, ast.FunctionDef) and n.name != "__buffer__"}
            assert own <= set(dir(getattr(_core, node.name)))


def test_marked_as_typed():
    assert (PACKAGE / "py.typed").is_file()


def test_types_hold():
    pytest.importorskip("mypy")
    done = subprocess.run(
        [sys.executable, "-m", "mypy", "--strict", "--cache-dir=/dev/null", str(ROOT / "bindings" / "python" / "libstub")],
        capture_output=True, text=True,
    )
    assert done.returncode == 0, done.stdout


# ---- the header -------------------------------------------------------------------------------------



@pytest.mark.parametrize("name", ["libstub.h", "libstub_ipc2581.h"])
def test_every_function_of_the_header_is_used(name):
    functions = set(re.findall(r"^LSTUB_API [^(]*?\b(lstub_\w+)\(", header(name), re.M))
    assert len(functions) > 15
    sources = "".join(p.read_text(encoding="utf-8") for p in (ROOT / "bindings" / "python" / "src").glob("*.c"))
    used = set(re.findall(r"\blstub_\w+", sources)) | {f"lstub_{n}" for n in re.findall(r"^FORMULA\((\w+)", sources, re.M)}
    assert functions - used == set()


def test_every_constant_of_the_header_is_there():
    text = header("libstub.h") + header("libstub_ipc2581.h")
    names = dict(re.findall(r"^#define LSTUB_([A-Z0-9_]+)\s+\(?(-?\d+)\)?", text, re.M))
    sizes = {"NAME_MAX", "LAYERS_MAX", "REASON_MAX"}
    assert set(names) - sizes == {name for name in dir(_core) if name.isupper()}
    assert all(getattr(_core, name) == int(value) for name, value in names.items() if name not in sizes)


def test_words_cover_the_constants():
    from libstub import _frozen

    for words, prefix in (
        (_frozen.SIDES, "SIDE_"), (_frozen.KIND, "LAYER_"), (_frozen.FIDELITY, "FIDELITY_"), (_frozen.TOLERANCE, "TOLERANCE_"),
        (_frozen.HOLE, "HOLE_"), (_frozen.SEVERITY, "NOTICE_"), (_frozen.ROUGHNESS, "ROUGHNESS_"), (_frozen.NETWORK, "NETWORK_"),
        (_frozen.FORMAT, "FORMAT_"), (_frozen.UNIT, "UNIT_"), (_frozen.MATRIX, "MATRIX_"), (_frozen.ORDER, "ORDER_"),
        (_frozen.ROW, "ROW_"), (_frozen.STUBS, "STUBS_"), (_frozen.METAL, "METAL_"), (_frozen.MODE, "MODE_"),
    ):
        codes = {name[len(prefix):].lower(): getattr(_core, name) for name in dir(_core) if name.startswith(prefix)}
        assert {words.word(code).lower(): code for code in codes.values()} == codes
        assert all(words.code("", words.word(code)) == code for code in codes.values())
    for enum, prefix in ((ls.Action, "ACTION_"), (ls.Reason, "REASON_"), (ls.Limit, "LIMIT_"), (ls.Quality, "QUALITY_")):
        assert {prefix + name for name in enum.__members__} == {name for name in dir(_core) if name.startswith(prefix)}


STRUCTS = {
    "margin": (ls.Margin, {"pass": "passes"}), "limit": (ls.StubLimit, {}), "notch": (ls.Notch, {}), "line": (ls.StubLine, {}),
    "stub": (ls.Stub, {}), "interval": (ls.Interval, {}), "cut": (ls.DrillCut, {}), "decision": (ls.Decision, {}),
    "group": (ls.DrillGroup, {}), "summary": (ls.PlanSummary, {}), "hole": (ls.Hole, {}), "notice": (ls.Notice, {}),
    "capability": (ls.Capability, {"tolerance_method": "tolerance"}), "job": (ls.Job, {}), "layer": (ls.Layer, {}),
    "conductor": (ls.Conductor, {}), "criteria": (ls.Criteria, {}), "signal": (ls.Signal, {"symbol_rate": "baud"}),
    "measured": (ls.MeasuredNotch, {}),
}


@pytest.mark.parametrize("shape", STRUCTS)
def test_members_are_in_the_order_of_the_struct(shape):
    cls, renamed = STRUCTS[shape]
    names = [renamed.get(name, name) for name, _ in _core.members(shape)]
    assert [field.name for field in dataclasses.fields(cls)] == names


@pytest.mark.parametrize("shape, struct", [("via", "via"), ("margin", "margin"), ("layer", "layer"), ("capability", "capability"),
                                           ("decision", "decision"), ("limit", "stub_limit"), ("line", "stub_line"),
                                           ("summary", "plan_summary"), ("group", "drill_group"), ("cut", "drill_cut"),
                                           ("trace", "trace"), ("port", "port"), ("measured", "measured_notch"), ("fit", "fit"),
                                           ("deviation", "loss_deviation"), ("loss_fit", "loss_fit"), ("conductor", "conductor")])
def test_no_member_of_a_struct_is_left_out(shape, struct):
    body = re.search(rf"typedef struct lstub_{struct} \{{(.*?)\}} lstub_{struct};", header("libstub.h"), re.S).group(1)
    body = re.sub(r"/\*.*?\*/|\[\d+\]", "", body, flags=re.S)
    names = set()
    for declaration in body.split(";"):
        names |= set(re.findall(r"(\w+)\s*(?=,|$)", declaration.strip()))
    counts = {name for name in names if name.endswith("_count") and name not in ("return_count", "stub_count")}
    assert names - counts - {"size", "reserved"} == {name for name, _ in _core.members(shape)}


def test_results_with_arrays_have_the_members_of_their_structs():
    assert [f.name for f in dataclasses.fields(ls.Fit)] == [name for name, _ in _core.members("fit")] + ["residuals", "stackup"]
    assert ls.LossDeviation._fields == tuple(name for name, _ in _core.members("deviation")) + ("deviation",)


def test_batches_have_the_members_of_their_structs():
    assert ls.Margins._fields == tuple(f.name for f in dataclasses.fields(ls.Margin)) + ("status",)
    assert ls.StubLimits._fields == tuple(f.name for f in dataclasses.fields(ls.StubLimit)) + ("status",)


# ---- the extension ----------------------------------------------------------------------------------


def test_versions():
    assert ls.__version__ == re.search(r'#define LSTUB_VERSION "([^"]+)"', header("libstub.h")).group(1)
    assert _core.abi == _core.ABI and isinstance(ls.model_revision, int)


def test_stable_abi():
    assert re.search(r"_core\.(abi3\.so|pyd)$", _core.__file__)


@pytest.mark.skipif(shutil.which("nm") is None, reason="needs nm")
@pytest.mark.skipif(sys.platform != "linux", reason="ELF only")
def test_the_extension_exports_its_entry_only():
    lines = subprocess.run(["nm", "-D", "--defined-only", _core.__file__], capture_output=True, text=True, check=True).stdout
    assert [line.split()[-1] for line in lines.splitlines()] == ["PyInit__core"]


def test_private_types_cannot_be_made():
    for cls in (_core.Handle, _core.Record, _core.ComplexArray):
        with pytest.raises(TypeError):
            cls()
        with pytest.raises(TypeError):
            cls.new_attribute = 1


def test_a_second_interpreter_has_its_own_module():
    interpreters = pytest.importorskip("_xxsubinterpreters")
    # one that shares the GIL: a slot that says more is not in the limited API of 3.11
    interpreter = interpreters.create(isolated=False)
    try:
        path = repr([str(PACKAGE.parent), *sys.path])
        interpreters.run_string(interpreter, f"import sys; sys.path[:] = {path}\nimport libstub as ls\n"
                                             "assert ls.coax(1e-3, 2e-3, 4.0).impedance > 20\n"
                                             "try: ls.Signal(-1)\nexcept ls.ArgumentError: pass\nelse: raise AssertionError")
    finally:
        interpreters.destroy(interpreter)


def test_private_calls_refuse_wrong_objects(via, model, stackup):
    for call in (
        lambda: _core.stackup_layers(1), lambda: _core.stackup_layers(model._handle), lambda: _core.via_check(stackup._handle, None),
        lambda: _core.via_check(stackup._handle, stackup._handle), lambda: _core.model_create(stackup._handle, via._record, None),
        lambda: _core.plan_count(stackup._handle), lambda: _core.board_holes(None), lambda: _core.rules_match(None, "x"),
        lambda: _core.record("nothing", ()), lambda: _core.record("margin", ()), lambda: _core.members(3), lambda: _core.members("x"),
        lambda: _core.formula(), lambda: _core.formula("x"), lambda: _core.formula("coax", 1.0), lambda: _core.formula("coax", *[1.0] * 9),
        lambda: _core.record("via", (1,) * 21), lambda: _core.record("layer", [1]),
    ):
        with pytest.raises((TypeError, ls.LibstubError)):
            call()
