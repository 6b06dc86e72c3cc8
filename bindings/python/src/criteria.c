/* What a signal can bear: margins, longest stubs, for one via and for many. */
#include "core.h"

#include <string.h>

static PyObject *of_signal(PyObject *module, PyObject *signal, const char *what,
                           int32_t (*call)(const lstub_signal *, double *, lstub_error *))
{
    core_state *state = core_of(module);
    const void *data = core_record_get(state, signal, SHAPE_SIGNAL, "signal");
    double value;
    lstub_error err;
    LSTUB_INIT(err);
    if (data == NULL || core_done(state, call(data, &value, &err), &err, what, 1, 1) < 0)
        return NULL;
    return PyFloat_FromDouble(value);
}

static PyObject *signal_nyquist(PyObject *module, PyObject *signal)
{
    return of_signal(module, signal, "Signal.nyquist", lstub_signal_nyquist);
}

static PyObject *signal_bit_rate(PyObject *module, PyObject *signal)
{
    return of_signal(module, signal, "Signal.bit_rate", lstub_signal_bit_rate);
}

static PyObject *model_margin(PyObject *module, PyObject *args)
{
    core_state *state = core_of(module);
    PyObject *handle, *signal, *criteria;
    const void *model, *link, *wanted;
    lstub_margin margin;
    int32_t status;
    lstub_error err;
    LSTUB_INIT(margin);
    LSTUB_INIT(err);
    if (!PyArg_ParseTuple(args, "OOO", &handle, &signal, &criteria))
        return NULL;
    model = core_handle_get(state, handle, HANDLE_MODEL);
    link = model ? core_record_get(state, signal, SHAPE_SIGNAL, "signal") : NULL;
    wanted = link ? core_record_get(state, criteria, SHAPE_CRITERIA, "criteria") : NULL;
    if (wanted == NULL)
        return NULL;
    Py_BEGIN_ALLOW_THREADS
    status = lstub_model_margin(model, link, wanted, &margin, &err);
    Py_END_ALLOW_THREADS
    return core_done(state, status, &err, "Model.margin", 1, 1) < 0 ? NULL : core_unpack(SHAPE_MARGIN, &margin);
}

static PyObject *highest_symbol_rate(PyObject *module, PyObject *args)
{
    core_state *state = core_of(module);
    PyObject *handle, *criteria;
    const void *model, *wanted;
    double rate = 0.0;
    int32_t limited_by = 0, status;
    lstub_error err;
    LSTUB_INIT(err);
    if (!PyArg_ParseTuple(args, "OO", &handle, &criteria))
        return NULL;
    model = core_handle_get(state, handle, HANDLE_MODEL);
    wanted = model ? core_record_get(state, criteria, SHAPE_CRITERIA, "criteria") : NULL;
    if (wanted == NULL)
        return NULL;
    Py_BEGIN_ALLOW_THREADS
    status = lstub_highest_symbol_rate(model, wanted, &rate, &limited_by, &err);
    Py_END_ALLOW_THREADS
    if (core_done(state, status, &err, "Model.highest_symbol_rate", 1, 1) < 0)
        return NULL;
    return Py_BuildValue("(di)", rate, (int)limited_by);
}

static PyObject *longest_stub(PyObject *module, PyObject *args)
{
    core_state *state = core_of(module);
    PyObject *handle, *rec[4];
    const void *stackup, *data[4];
    static const int shape[4] = {SHAPE_VIA, SHAPE_OPTIONS, SHAPE_SIGNAL, SHAPE_CRITERIA};
    static const char *const name[4] = {"via", "options", "signal", "criteria"};
    lstub_stub_limit limit;
    int32_t status;
    lstub_error err;
    int side, i;
    LSTUB_INIT(limit);
    LSTUB_INIT(err);
    if (!PyArg_ParseTuple(args, "OOiOOO", &handle, &rec[0], &side, &rec[1], &rec[2], &rec[3]))
        return NULL;
    stackup = core_handle_get(state, handle, HANDLE_STACKUP);
    for (i = 0; stackup != NULL && i < 4; i++)
        if ((data[i] = core_record_get(state, rec[i], shape[i], name[i])) == NULL)
            return NULL;
    if (stackup == NULL)
        return NULL;
    Py_BEGIN_ALLOW_THREADS
    status = lstub_longest_stub(stackup, data[0], side, data[1], data[2], data[3], &limit, &err);
    Py_END_ALLOW_THREADS
    return core_done(state, status, &err, "longest_stub", 1, 1) < 0 ? NULL : core_unpack(SHAPE_LIMIT, &limit);
}

/* ---- batches ------------------------------------------------------------------------------------- */

typedef struct batch {      /* what both batches take and give */
    const lstub_stackup *stackup;
    const void          *options;
    core_gather          vias, signals, criteria;
    core_buffer          status;
    int32_t             *sides;
    size_t               side_stride;
    char                *out;
} batch;

static int batch_length(core_state *state, const core_gather *gather, size_t count, const char *name)
{
    if (gather->stride == 0 || gather->count == count)
        return 0;
    return core_bad_argument(state, name, "%s: %zd items: must be one, or as many as vias (%zd)", name,
                             (Py_ssize_t)gather->count, (Py_ssize_t)count);
}

static int batch_take(core_state *state, batch *b, int shape, PyObject *const *arg)
{
    size_t size = core_shape_of(shape)->size, i;
    b->stackup = core_handle_get(state, arg[0], HANDLE_STACKUP);
    if (b->stackup == NULL || (b->options = core_record_get(state, arg[1], SHAPE_OPTIONS, "options")) == NULL)
        return -1;
    if (core_gather_take(state, arg[2], SHAPE_VIA, "vias", &b->vias) < 0 ||
        core_gather_take(state, arg[3], SHAPE_SIGNAL, "signals", &b->signals) < 0 ||
        core_gather_take(state, arg[4], SHAPE_CRITERIA, "criteria", &b->criteria) < 0 ||
        batch_length(state, &b->signals, b->vias.count, "signals") < 0 ||
        batch_length(state, &b->criteria, b->vias.count, "criteria") < 0 ||
        core_buffer_write(arg[5], "status", 'i', b->vias.count, &b->status) < 0)
        return -1;
    b->out = PyMem_Calloc(b->vias.count + 1, size);
    if (b->out == NULL) {
        PyErr_NoMemory();
        return -1;
    }
    for (i = 0; i < b->vias.count; i++)
        lstub_init(b->out + i * size, size);
    return 0;
}

static int batch_sides(core_state *state, batch *b, PyObject *sides)
{
    Py_ssize_t count = PyTuple_Check(sides) ? PyTuple_Size(sides) : 1, i;
    b->side_stride = PyTuple_Check(sides) ? sizeof(int32_t) : 0;
    b->sides = PyMem_Calloc((size_t)count + 1, sizeof(int32_t));
    if (b->sides == NULL) {
        PyErr_NoMemory();
        return -1;
    }
    if (b->side_stride == 0)
        return core_int(state, sides, "sides", b->sides);
    if ((size_t)count != b->vias.count)
        return core_bad_argument(state, "sides", "sides: %zd items: must be one, or as many as vias (%zd)", count,
                                 (Py_ssize_t)b->vias.count);
    for (i = 0; i < count; i++)
        if (core_int(state, PyTuple_GetItem(sides, i), "sides", &b->sides[i]) < 0)
            return -1;
    return 0;
}

static PyObject *batch_end(core_state *state, batch *b, int shape, PyObject *columns, int32_t status,
                           const lstub_error *err)
{
    PyObject *result = NULL;
    if (columns != NULL && core_columns(state, shape, b->out, b->vias.count, columns) == 0)
        result = core_batch_result(status, err);
    core_gather_free(&b->vias);
    core_gather_free(&b->signals);
    core_gather_free(&b->criteria);
    core_buffer_free(&b->status);
    PyMem_Free(b->sides);
    PyMem_Free(b->out);
    return result;
}

/* margin_batch(stackup, options, vias, signals, criteria, status, columns) */
static PyObject *margin_batch(PyObject *module, PyObject *args)
{
    core_state *state = core_of(module);
    PyObject *arg[6], *columns;
    batch b = {0};
    int32_t status;
    lstub_error err;
    LSTUB_INIT(err);
    if (!PyArg_ParseTuple(args, "OOOOOOO", &arg[0], &arg[1], &arg[2], &arg[3], &arg[4], &arg[5], &columns))
        return NULL;
    if (batch_take(state, &b, SHAPE_MARGIN, arg) < 0)
        return batch_end(state, &b, SHAPE_MARGIN, NULL, 0, &err);
    Py_BEGIN_ALLOW_THREADS
    status = lstub_margin_batch(b.stackup, b.vias.items, sizeof(lstub_via), b.signals.items, b.signals.stride,
                                b.criteria.items, b.criteria.stride, b.vias.count, b.options, (lstub_margin *)(void *)b.out,
                                sizeof(lstub_margin), b.status.data, &err);
    Py_END_ALLOW_THREADS
    return batch_end(state, &b, SHAPE_MARGIN, columns, status, &err);
}

/* longest_stub_batch(stackup, options, vias, signals, criteria, status, columns, sides) */
static PyObject *longest_stub_batch(PyObject *module, PyObject *args)
{
    core_state *state = core_of(module);
    PyObject *arg[6], *columns, *sides;
    batch b = {0};
    int32_t status;
    lstub_error err;
    LSTUB_INIT(err);
    if (!PyArg_ParseTuple(args, "OOOOOOOO", &arg[0], &arg[1], &arg[2], &arg[3], &arg[4], &arg[5], &columns, &sides))
        return NULL;
    if (batch_take(state, &b, SHAPE_LIMIT, arg) < 0 || batch_sides(state, &b, sides) < 0)
        return batch_end(state, &b, SHAPE_LIMIT, NULL, 0, &err);
    Py_BEGIN_ALLOW_THREADS
    status = lstub_longest_stub_batch(b.stackup, b.vias.items, sizeof(lstub_via), b.sides, b.side_stride, b.signals.items,
                                      b.signals.stride, b.criteria.items, b.criteria.stride, b.vias.count, b.options,
                                      (lstub_stub_limit *)(void *)b.out, sizeof(lstub_stub_limit), b.status.data, &err);
    Py_END_ALLOW_THREADS
    return batch_end(state, &b, SHAPE_LIMIT, columns, status, &err);
}

PyMethodDef core_criteria_methods[] = {
    {"signal_nyquist", signal_nyquist, METH_O, NULL},
    {"signal_bit_rate", signal_bit_rate, METH_O, NULL},
    {"model_margin", model_margin, METH_VARARGS, NULL},
    {"highest_symbol_rate", highest_symbol_rate, METH_VARARGS, NULL},
    {"longest_stub", longest_stub, METH_VARARGS, NULL},
    {"margin_batch", margin_batch, METH_VARARGS, NULL},
    {"longest_stub_batch", longest_stub_batch, METH_VARARGS, NULL},
    {NULL, NULL, 0, NULL},
};
