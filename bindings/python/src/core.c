/* The module: state, types, constants. Initialised in two phases, so that every interpreter has its own. */
#include "core.h"

core_state *core_of(PyObject *module) { return PyModule_GetState(module); }

/* ---- small functions ----------------------------------------------------------------------------- */

static PyObject *name_of(PyObject *module, PyObject *value, const char *(*name)(int32_t))
{
    int32_t number;
    if (core_int(core_of(module), value, "value", &number) < 0)
        return NULL;
    return core_text(name(number));
}

static PyObject *status_name(PyObject *module, PyObject *value) { return name_of(module, value, lstub_status_name); }
static PyObject *action_name(PyObject *module, PyObject *value) { return name_of(module, value, lstub_action_name); }
static PyObject *reason_name(PyObject *module, PyObject *value) { return name_of(module, value, lstub_reason_name); }
static PyObject *remark_text(PyObject *module, PyObject *value) { return name_of(module, value, lstub_remark_text); }

static PyObject *number(PyObject *module, PyObject *args)
{
    const char *name;
    PyObject *value;
    double out;
    if (!PyArg_ParseTuple(args, "sO", &name, &value) || core_number(core_of(module), value, name, &out) < 0)
        return NULL;
    return PyFloat_FromDouble(out);
}

static PyObject *integer(PyObject *module, PyObject *args)
{
    const char *name;
    PyObject *value;
    int32_t out;
    if (!PyArg_ParseTuple(args, "sO", &name, &value) || core_int(core_of(module), value, name, &out) < 0)
        return NULL;
    return PyLong_FromLong(out);
}

static PyObject *record(PyObject *module, PyObject *args)
{
    const char *name;
    PyObject *values;
    int shape;
    if (!PyArg_ParseTuple(args, "sO!", &name, &PyTuple_Type, &values))
        return NULL;
    shape = core_shape_named(core_of(module), name);
    return shape < 0 ? NULL : core_record_new(core_of(module), shape, values);
}

static PyObject *members(PyObject *module, PyObject *value)
{
    const char *name = PyUnicode_Check(value) ? PyUnicode_AsUTF8AndSize(value, NULL) : "";
    int shape = name ? core_shape_named(core_of(module), name) : -1;
    const core_shape *table;
    PyObject *tuple;
    size_t i;
    if (shape < 0)
        return NULL;
    table = core_shape_of(shape);
    tuple = PyTuple_New((Py_ssize_t)table->members);
    for (i = 0; tuple != NULL && i < table->members; i++) {
        PyObject *item = Py_BuildValue("(sC)", table->member[i].name, table->member[i].type);
        if (item == NULL || PyTuple_SetItem(tuple, (Py_ssize_t)i, item) < 0)
            Py_CLEAR(tuple);
    }
    return tuple;
}

static PyMethodDef methods[] = {
    {"status_name", status_name, METH_O, NULL},
    {"action_name", action_name, METH_O, NULL},
    {"reason_name", reason_name, METH_O, NULL},
    {"remark_text", remark_text, METH_O, NULL},
    {"number", number, METH_VARARGS, NULL},
    {"integer", integer, METH_VARARGS, NULL},
    {"record", record, METH_VARARGS, NULL},
    {"members", members, METH_O, NULL},
    {"complex_array", core_complex_array, METH_O, NULL},
    {NULL, NULL, 0, NULL},
};

/* ---- constants ----------------------------------------------------------------------------------- */

#define CONSTANT(name) { #name, LSTUB_##name }

static const struct { const char *name; int value; } constants[] = {
    CONSTANT(ABI),
    CONSTANT(OK), CONSTANT(W_RANGE), CONSTANT(W_CAPACITY), CONSTANT(E_ARGUMENT), CONSTANT(E_NULL), CONSTANT(E_SIZE),
    CONSTANT(E_NEWER), CONSTANT(E_MEMORY), CONSTANT(E_GEOMETRY), CONSTANT(E_NONE), CONSTANT(E_UNSUPPORTED),
    CONSTANT(E_MIXED), CONSTANT(E_READ), CONSTANT(E_WRITE), CONSTANT(E_FORMAT),
    CONSTANT(LAYER_DIELECTRIC), CONSTANT(LAYER_SIGNAL), CONSTANT(LAYER_PLANE), CONSTANT(LAYER_MIXED),
    CONSTANT(SIDE_TOP), CONSTANT(SIDE_BOTTOM), CONSTANT(SIDE_BOTH),
    CONSTANT(RETURN_NONE), CONSTANT(RETURN_VIAS), CONSTANT(RETURN_WALL),
    CONSTANT(PAIR_NONE), CONSTANT(PAIR_SEPARATE), CONSTANT(PAIR_SHARED), CONSTANT(PADS_REMOVED), CONSTANT(PADS_KEPT),
    CONSTANT(FIDELITY_DEFAULT), CONSTANT(FIDELITY_BULK), CONSTANT(FIDELITY_LOADED),
    CONSTANT(FIDELITY_LADDER), CONSTANT(FIDELITY_CAVITY), CONSTANT(ALL_STUBS),
    CONSTANT(LIMIT_NONE), CONSTANT(LIMIT_NOTCH), CONSTANT(LIMIT_LOSS),
    CONSTANT(TOLERANCE_WORST), CONSTANT(TOLERANCE_RSS),
    CONSTANT(ACTION_NOT_JUDGED), CONSTANT(ACTION_KEEP), CONSTANT(ACTION_DRILL_TOP), CONSTANT(ACTION_DRILL_BOTTOM),
    CONSTANT(ACTION_DRILL_BOTH), CONSTANT(ACTION_CANNOT), CONSTANT(ACTION_REFUSED),
    CONSTANT(REASON_NO_SIGNAL), CONSTANT(REASON_NO_STUB), CONSTANT(REASON_PASSES), CONSTANT(REASON_FAILS),
    CONSTANT(REASON_LIMIT_TOO_SHORT), CONSTANT(REASON_NO_ROOM), CONSTANT(REASON_SIDE), CONSTANT(REASON_WALL),
    CONSTANT(REASON_ASPECT), CONSTANT(REASON_DEPTHS), CONSTANT(REASON_PIN), CONSTANT(REASON_BURIED),
    CONSTANT(REASON_DRILLED), CONSTANT(REASON_ERROR), CONSTANT(REASON_ONE_LAYER),
    CONSTANT(HOLE_VIA), CONSTANT(HOLE_PIN), CONSTANT(NOTICE_NOTE), CONSTANT(NOTICE_WARNING), CONSTANT(NOTICE_REFUSED),
    CONSTANT(ROUGHNESS_HAMMERSTAD), CONSTANT(ROUGHNESS_SPHERES), CONSTANT(TRACE_MICROSTRIP),
    CONSTANT(TRACE_STRIPLINE), CONSTANT(PORTS_MAX), CONSTANT(NETWORK_S), CONSTANT(NETWORK_Z), CONSTANT(NETWORK_Y),
    CONSTANT(NETWORK_ABCD), CONSTANT(NETWORK_G), CONSTANT(NETWORK_H), CONSTANT(FORMAT_RI), CONSTANT(FORMAT_MA),
    CONSTANT(FORMAT_DB), CONSTANT(UNIT_HZ), CONSTANT(UNIT_KHZ), CONSTANT(UNIT_MHZ), CONSTANT(UNIT_GHZ),
    CONSTANT(MATRIX_FULL), CONSTANT(MATRIX_LOWER), CONSTANT(MATRIX_UPPER), CONSTANT(ORDER_21_12),
    CONSTANT(ORDER_12_21), CONSTANT(ROW_SINGLE), CONSTANT(ROW_DIFFERENTIAL), CONSTANT(ROW_COMMON),
    CONSTANT(QUALITY_GOOD), CONSTANT(QUALITY_SHALLOW), CONSTANT(QUALITY_EDGE), CONSTANT(QUALITY_RIPPLE),
    CONSTANT(QUALITY_WIDE), CONSTANT(QUALITY_FLOOR), CONSTANT(EDGE_OPEN), CONSTANT(EDGE_SHORTED),
    CONSTANT(PORT_TRACE), CONSTANT(PORT_COAX), CONSTANT(STUBS_KEPT), CONSTANT(STUBS_REMOVED), CONSTANT(METAL_LOSSY),
    CONSTANT(METAL_PERFECT), CONSTANT(MODE_SINGLE), CONSTANT(MODE_ODD), CONSTANT(MODE_EVEN),
    CONSTANT(REMARK_RADIATES), CONSTANT(REMARK_LAUNCH), CONSTANT(REMARK_OUTER), CONSTANT(REMARK_SLOT),
    CONSTANT(REMARK_UNEQUAL),
};

/* ---- set-up -------------------------------------------------------------------------------------- */

static int add_type(PyObject *module, PyType_Spec *spec, const char *name, PyObject **out)
{
    *out = PyType_FromModuleAndSpec(module, spec, NULL);
    return *out == NULL ? -1 : PyModule_AddObjectRef(module, name, *out);
}

static int take_errors(core_state *state)
{
    PyObject *errors = PyImport_ImportModule("libstub._errors");
    if (errors == NULL)
        return -1;
    state->error_for = PyObject_GetAttrString(errors, "error_for");
    state->warn_range = PyObject_GetAttrString(errors, "warn_range");
    Py_DECREF(errors);
    return state->error_for != NULL && state->warn_range != NULL ? 0 : -1;
}

static int add_constants(PyObject *module)
{
    size_t i;
    for (i = 0; i < sizeof constants / sizeof constants[0]; i++)
        if (PyModule_AddIntConstant(module, constants[i].name, constants[i].value) < 0)
            return -1;
    if (PyModule_AddIntConstant(module, "abi", lstub_abi()) < 0 ||
        PyModule_AddIntConstant(module, "model_revision", lstub_model_revision()) < 0)
        return -1;
    return PyModule_AddStringConstant(module, "version", lstub_version());
}

static int execute(PyObject *module)
{
    PyMethodDef *const parts[] = {methods, core_formula_methods, core_geometry_methods, core_model_methods,
                                  core_criteria_methods, core_plan_methods, core_board_methods, core_trace_methods,
                                  core_network_methods, core_touchstone_methods, core_measure_methods,
                                  core_transition_methods};
    core_state *state = core_of(module);
    size_t i;
    if (lstub_abi() != LSTUB_ABI) {
        PyErr_Format(PyExc_ImportError, "libstub has ABI %d, this binding was built for %d", (int)lstub_abi(), LSTUB_ABI);
        return -1;
    }
    for (i = 0; i < sizeof parts / sizeof parts[0]; i++)
        if (PyModule_AddFunctions(module, parts[i]) < 0)
            return -1;
    if (add_type(module, core_handle_spec(), "Handle", &state->handle_type) < 0 ||
        add_type(module, core_record_spec(), "Record", &state->record_type) < 0 ||
        add_type(module, core_complex_spec(), "ComplexArray", &state->complex_type) < 0)
        return -1;
    return take_errors(state) < 0 ? -1 : add_constants(module);
}

static int traverse(PyObject *module, visitproc visit, void *arg)
{
    core_state *state = core_of(module);
    Py_VISIT(state->handle_type);
    Py_VISIT(state->record_type);
    Py_VISIT(state->complex_type);
    Py_VISIT(state->error_for);
    Py_VISIT(state->warn_range);
    return 0;
}

static int clear(PyObject *module)
{
    core_state *state = core_of(module);
    Py_CLEAR(state->handle_type);
    Py_CLEAR(state->record_type);
    Py_CLEAR(state->complex_type);
    Py_CLEAR(state->error_for);
    Py_CLEAR(state->warn_range);
    return 0;
}

static void release(void *module) { clear(module); }

static PyModuleDef_Slot slots[] = {{Py_mod_exec, execute}, {0, NULL}};

static PyModuleDef definition = {
    PyModuleDef_HEAD_INIT, "_core", "The C library as the package around it sees it; private.", sizeof(core_state),
    NULL, slots, traverse, clear, release,
};

PyMODINIT_FUNC PyInit__core(void) { return PyModuleDef_Init(&definition); }
