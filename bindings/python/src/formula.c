/* The closed forms: one call, one table. */
#include "core.h"

#include <string.h>

#define IN_MAX 5
#define OUT_MAX 3

/* Doubles in the order of the header; its one integer, if any, apart. */
typedef int32_t (*formula_call)(const double *a, int32_t n, double *out, lstub_error *err);

#define FORMULA(name, ...) \
    static int32_t name(const double *a, int32_t n, double *out, lstub_error *err) \
    { (void)n; return lstub_##name(__VA_ARGS__, err); }

FORMULA(quarter_wave_frequency, a[0], a[1], n, out)
FORMULA(quarter_wave_length, a[0], a[1], n, out)
FORMULA(quarter_wave_dk, a[0], a[1], n, out)
FORMULA(delay_dk, a[0], out)
FORMULA(loaded_stub_frequency, a[0], a[1], a[2], a[3], n, out)
FORMULA(notch_floor, a[0], a[1], a[2], n, out)
FORMULA(stub_skirt, a[0], a[1], a[2], out)
FORMULA(rule_of_thumb_length, a[0], out)
FORMULA(coax, a[0], a[1], a[2], out, out + 1, out + 2)
FORMULA(return_inductance, a[0], n, a[1], a[2], out)
FORMULA(twin_rod, a[0], a[1], a[2], out, out + 1)
FORMULA(plate_capacitance, a[0], a[1], a[2], a[3], a[4], out)
FORMULA(handbook_capacitance, a[0], a[1], a[2], a[3], out)
FORMULA(handbook_inductance, a[0], a[1], out)
FORMULA(skin_depth, a[0], a[1], out)
FORMULA(fit_effective_dk, a[0], a[1], a[2], a[3], n, out, out + 1)
FORMULA(fit_length, a[0], a[1], a[2], a[3], n, out, out + 1)

static const struct {
    const char  *name;
    const char  *arguments[IN_MAX];   /* in the order of the header */
    int          integer;             /* place of the integer, -1: none */
    int          results;
    formula_call call;
} formulas[] = {
    {"quarter_wave_frequency", {"length", "dk", "n"}, 2, 1, quarter_wave_frequency},
    {"quarter_wave_length", {"f", "dk", "n"}, 2, 1, quarter_wave_length},
    {"quarter_wave_dk", {"f", "length", "n"}, 2, 1, quarter_wave_dk},
    {"delay_dk", {"delay"}, -1, 1, delay_dk},
    {"loaded_stub_frequency", {"length", "dk", "zs", "end_capacitance", "n"}, 4, 1, loaded_stub_frequency},
    {"notch_floor", {"zs", "z0", "loss_tangent", "n"}, 3, 1, notch_floor},
    {"stub_skirt", {"zs", "z0", "f_over_f1"}, -1, 1, stub_skirt},
    {"rule_of_thumb_length", {"bit_rate"}, -1, 1, rule_of_thumb_length},
    {"coax", {"inner_diameter", "outer_diameter", "dk"}, -1, 3, coax},
    {"return_inductance", {"drill", "count", "distance", "return_drill"}, 1, 1, return_inductance},
    {"twin_rod", {"drill", "pitch", "dk"}, -1, 2, twin_rod},
    {"plate_capacitance", {"drill", "antipad", "spacing", "dk_through_plane", "dk_in_plane"}, -1, 1, plate_capacitance},
    {"handbook_capacitance", {"thickness", "pad", "antipad", "dk"}, -1, 1, handbook_capacitance},
    {"handbook_inductance", {"length", "diameter"}, -1, 1, handbook_inductance},
    {"skin_depth", {"conductivity", "f"}, -1, 1, skin_depth},
    {"fit_effective_dk", {"f", "f_sigma", "length", "length_sigma", "n"}, 4, 2, fit_effective_dk},
    {"fit_length", {"f", "f_sigma", "dk", "dk_sigma", "n"}, 4, 2, fit_length},
};

static int find(const char *name)
{
    size_t i;
    for (i = 0; i < sizeof formulas / sizeof formulas[0]; i++)
        if (strcmp(formulas[i].name, name) == 0)
            return (int)i;
    return -1;
}

static int take_arguments(core_state *state, int k, PyObject *args, double *in, int32_t *n)
{
    Py_ssize_t i;
    for (i = 1; i < PyTuple_Size(args); i++) {
        PyObject *value = PyTuple_GetItem(args, i);
        const char *name = i <= IN_MAX ? formulas[k].arguments[i - 1] : NULL;
        if (name == NULL)
            return core_bad_argument(state, "formula", "formula: too many arguments");
        if (i - 1 == formulas[k].integer ? core_int(state, value, name, n) < 0 : core_number(state, value, name, in++) < 0)
            return -1;
    }
    if (i <= IN_MAX && formulas[k].arguments[i - 1] != NULL)
        return core_bad_argument(state, "formula", "formula: too few arguments");
    return 0;
}

/* formula(name, *arguments) -> float, or a tuple where the header has several results */
static PyObject *formula(PyObject *module, PyObject *args)
{
    core_state *state = core_of(module);
    PyObject *name = PyTuple_Size(args) > 0 ? PyTuple_GetItem(args, 0) : NULL;
    const char *text = name && PyUnicode_Check(name) ? PyUnicode_AsUTF8AndSize(name, NULL) : NULL;
    double in[IN_MAX] = {0}, out[OUT_MAX] = {0};
    int k = text ? find(text) : -1;
    int32_t n = 0;
    lstub_error err;
    LSTUB_INIT(err);
    if (k < 0) {
        core_bad_argument(state, "formula", "formula: there is no such formula");
        return NULL;
    }
    if (take_arguments(state, k, args, in, &n) < 0 ||
        core_done(state, formulas[k].call(in, n, out, &err), &err, formulas[k].name, 1, 1) < 0)
        return NULL;
    switch (formulas[k].results) {
    case 1:  return PyFloat_FromDouble(out[0]);
    case 2:  return Py_BuildValue("(dd)", out[0], out[1]);
    default: return Py_BuildValue("(ddd)", out[0], out[1], out[2]);
    }
}

PyMethodDef core_formula_methods[] = {
    {"formula", formula, METH_VARARGS, NULL},
    {NULL, NULL, 0, NULL},
};
