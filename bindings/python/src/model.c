/* The model of one via, and the first notches of many. */
#include "core.h"

#include <string.h>

static PyObject *model_create(PyObject *module, PyObject *args)
{
    core_state *state = core_of(module);
    PyObject *stackup, *via, *options;
    const lstub_stackup *board;
    const void *geometry, *choice;
    lstub_model *model = NULL;
    int32_t status;
    lstub_error err;
    LSTUB_INIT(err);
    if (!PyArg_ParseTuple(args, "OOO", &stackup, &via, &options))
        return NULL;
    board = core_handle_get(state, stackup, HANDLE_STACKUP);
    geometry = board ? core_record_get(state, via, SHAPE_VIA, "via") : NULL;
    choice = geometry ? core_record_get(state, options, SHAPE_OPTIONS, "options") : NULL;
    if (choice == NULL)
        return NULL;
    Py_BEGIN_ALLOW_THREADS
    status = lstub_model_create(board, geometry, choice, NULL, &model, &err);
    Py_END_ALLOW_THREADS
    if (core_done(state, status, &err, "Model", 1, 1) < 0) {
        lstub_model_destroy(model);
        return NULL;
    }
    return core_handle_new(state, HANDLE_MODEL, model);
}

static PyObject *stub_item(core_state *state, const void *model, size_t i)
{
    lstub_stub stub;
    lstub_error err;
    LSTUB_INIT(stub);
    LSTUB_INIT(err);
    if (core_done(state, lstub_model_stub(model, (int32_t)i, &stub, &err), &err, "Model.stubs", 1, 1) < 0)
        return NULL;
    return core_unpack(SHAPE_STUB, &stub);
}

static PyObject *model_stubs(PyObject *module, PyObject *handle)
{
    core_state *state = core_of(module);
    const lstub_model *model = core_handle_get(state, handle, HANDLE_MODEL);
    return model == NULL ? NULL : core_tuple(state, model, (size_t)lstub_model_stub_count(model), stub_item);
}

static PyObject *model_line(PyObject *module, PyObject *args)
{
    core_state *state = core_of(module);
    const lstub_model *model;
    PyObject *handle, *number;
    lstub_stub_line line;
    int32_t stub;
    lstub_error err;
    LSTUB_INIT(line);
    LSTUB_INIT(err);
    if (!PyArg_ParseTuple(args, "OO", &handle, &number))
        return NULL;
    model = core_handle_get(state, handle, HANDLE_MODEL);
    if (model == NULL || core_int(state, number, "stub", &stub) < 0 ||
        core_done(state, lstub_model_line(model, stub, &line, &err), &err, "Model.line", 1, 1) < 0)
        return NULL;
    return core_unpack(SHAPE_LINE, &line);
}

/* ---- over frequency ------------------------------------------------------------------------------ */

typedef int32_t (*model_call)(const lstub_model *, int32_t, const double *, size_t, double *, int32_t *, lstub_error *);

static Py_ssize_t out_of_range(const int32_t *status, size_t n)
{
    Py_ssize_t count = 0;
    size_t i;
    for (i = 0; i < n; i++)
        count += status[i] == LSTUB_W_RANGE;
    return count;
}

static PyObject *evaluate(PyObject *module, PyObject *args, model_call call, char type, const char *what)
{
    core_state *state = core_of(module);
    PyObject *handle, *number, *f, *to;
    core_buffer freq = {0}, out = {0};
    const lstub_model *model;
    int32_t stub, status, *each = NULL;
    lstub_error err;
    int done = -1;
    LSTUB_INIT(err);
    if (!PyArg_ParseTuple(args, "OOOO", &handle, &number, &f, &to))
        return NULL;
    model = core_handle_get(state, handle, HANDLE_MODEL);
    if (model == NULL || core_int(state, number, "stub", &stub) < 0 || core_buffer_read(f, "f", &freq) < 0 ||
        core_buffer_write(to, "out", type, freq.count, &out) < 0 || core_buffers_apart(&freq, &out, "out") < 0)
        goto end;
    each = PyMem_Calloc(freq.count + 1, sizeof *each);
    if (each == NULL) {
        PyErr_NoMemory();
        goto end;
    }
    Py_BEGIN_ALLOW_THREADS
    status = call(model, stub, freq.data, freq.count, out.data, each, &err);
    Py_END_ALLOW_THREADS
    done = core_done(state, status, &err, what, out_of_range(each, freq.count), (Py_ssize_t)freq.count);
end:
    PyMem_Free(each);
    core_buffer_free(&freq);
    core_buffer_free(&out);
    if (done < 0)
        return NULL;
    Py_RETURN_NONE;
}

static PyObject *model_zin(PyObject *module, PyObject *args)
{
    return evaluate(module, args, lstub_model_zin, 'Z', "Model.zin");
}

static PyObject *model_s21(PyObject *module, PyObject *args)
{
    return evaluate(module, args, lstub_model_s21, 'Z', "Model.s21");
}

static PyObject *model_added_loss(PyObject *module, PyObject *args)
{
    return evaluate(module, args, lstub_model_added_loss, 'd', "Model.added_loss");
}

/* ---- notches ------------------------------------------------------------------------------------- */

static PyObject *notch_item(core_state *state, const void *notches, size_t i)
{
    (void)state;
    return core_unpack(SHAPE_NOTCH, (const lstub_notch *)notches + i);
}

/* model_notches(model, stub, f_max, most) -> at most `most` notches, the lowest */
static PyObject *model_notches(PyObject *module, PyObject *args)
{
    core_state *state = core_of(module);
    PyObject *handle, *number, *limit, *tuple = NULL;
    const lstub_model *model;
    lstub_notch *notches = NULL;
    size_t capacity = 16, count = 0, i;
    Py_ssize_t most;
    double f_max;
    int32_t stub, status;
    lstub_error err;
    LSTUB_INIT(err);
    if (!PyArg_ParseTuple(args, "OOOn", &handle, &number, &limit, &most))
        return NULL;
    model = core_handle_get(state, handle, HANDLE_MODEL);
    if (model == NULL || core_int(state, number, "stub", &stub) < 0 || core_number(state, limit, "up_to", &f_max) < 0)
        return NULL;
    do {
        capacity = (size_t)most < capacity ? (size_t)most : count > capacity ? count : capacity;
        PyMem_Free(notches);
        notches = PyMem_Calloc(capacity + 1, sizeof *notches);
        if (notches == NULL)
            return PyErr_NoMemory();
        for (i = 0; i < capacity; i++)
            LSTUB_INIT(notches[i]);
        Py_BEGIN_ALLOW_THREADS
        status = lstub_model_notches(model, stub, f_max, notches, capacity, sizeof notches[0], &count, &err);
        Py_END_ALLOW_THREADS
    } while (status == LSTUB_W_CAPACITY && capacity < (size_t)most && count > capacity);
    if (core_done(state, status, &err, "Model.notches", 1, 1) == 0)
        tuple = core_tuple(state, notches, count < capacity ? count : capacity, notch_item);
    PyMem_Free(notches);
    return tuple;
}

/* first_notch_batch(stackup, vias, options, f1, dk_effective, length, status) */
static PyObject *first_notch_batch(PyObject *module, PyObject *args)
{
    core_state *state = core_of(module);
    static const char *const names[] = {"f1", "dk_effective", "length", "status"};
    PyObject *stackup, *vias, *options, *to[4], *result = NULL;
    core_buffer out[4] = {{0}, {0}, {0}, {0}};
    const lstub_stackup *board;
    const void *choice;
    core_gather gather = {0};
    int32_t status;
    lstub_error err;
    int i;
    LSTUB_INIT(err);
    if (!PyArg_ParseTuple(args, "OOOOOOO", &stackup, &vias, &options, &to[0], &to[1], &to[2], &to[3]))
        return NULL;
    board = core_handle_get(state, stackup, HANDLE_STACKUP);
    choice = board ? core_record_get(state, options, SHAPE_OPTIONS, "options") : NULL;
    if (choice == NULL || core_gather_take(state, vias, SHAPE_VIA, "vias", &gather) < 0)
        goto end;
    for (i = 0; i < 4; i++)
        if (core_buffer_write(to[i], names[i], i < 3 ? 'd' : 'i', gather.count, &out[i]) < 0)
            goto end;
    Py_BEGIN_ALLOW_THREADS
    status = lstub_first_notch_batch(board, gather.items, gather.count, sizeof(lstub_via), choice, out[0].data,
                                     out[1].data, out[2].data, out[3].data, &err);
    Py_END_ALLOW_THREADS
    result = core_batch_result(status, &err);
end:
    for (i = 0; i < 4; i++)
        core_buffer_free(&out[i]);
    core_gather_free(&gather);
    return result;
}

PyMethodDef core_model_methods[] = {
    {"model_create", model_create, METH_VARARGS, NULL},
    {"model_stubs", model_stubs, METH_O, NULL},
    {"model_line", model_line, METH_VARARGS, NULL},
    {"model_zin", model_zin, METH_VARARGS, NULL},
    {"model_s21", model_s21, METH_VARARGS, NULL},
    {"model_added_loss", model_added_loss, METH_VARARGS, NULL},
    {"model_notches", model_notches, METH_VARARGS, NULL},
    {"first_notch_batch", first_notch_batch, METH_VARARGS, NULL},
    {NULL, NULL, 0, NULL},
};
