/* Material, stackup, via. */
#include "core.h"

static PyObject *permittivity(PyObject *module, PyObject *args)
{
    core_state *state = core_of(module);
    PyObject *dielectric, *f, *through, *in_plane;
    core_buffer freq = {0}, to[2] = {{0}, {0}};
    const void *data;
    lstub_error err;
    int32_t status;
    int done = -1;
    LSTUB_INIT(err);
    if (!PyArg_ParseTuple(args, "OOOO", &dielectric, &f, &through, &in_plane))
        return NULL;
    data = core_record_get(state, dielectric, SHAPE_DIELECTRIC, "dielectric");
    if (data == NULL || core_buffer_read(f, "f", &freq) < 0 ||
        core_buffer_write(through, "through_plane", 'Z', freq.count, &to[0]) < 0 ||
        core_buffer_write(in_plane, "in_plane", 'Z', freq.count, &to[1]) < 0 ||
        core_buffers_apart(&freq, &to[0], "through_plane") < 0 || core_buffers_apart(&freq, &to[1], "in_plane") < 0)
        goto end;
    Py_BEGIN_ALLOW_THREADS
    status = lstub_dielectric_permittivity(data, freq.data, freq.count, to[0].data, to[1].data, &err);
    Py_END_ALLOW_THREADS
    done = core_done(state, status, &err, "Dielectric.permittivity", 1, 1);
end:
    core_buffer_free(&freq);
    core_buffer_free(&to[0]);
    core_buffer_free(&to[1]);
    if (done < 0)
        return NULL;
    Py_RETURN_NONE;
}

/* Whether the values are within their ranges: the library says so where they are used, so use them once. */
static PyObject *dielectric_check(PyObject *module, PyObject *dielectric)
{
    core_state *state = core_of(module);
    const void *data = core_record_get(state, dielectric, SHAPE_DIELECTRIC, "dielectric");
    double f = 1e9, eps[2];
    lstub_error err;
    LSTUB_INIT(err);
    if (data == NULL ||
        core_done(state, lstub_dielectric_permittivity(data, &f, 1, eps, NULL, &err), &err, "Dielectric", 1, 1) < 0)
        return NULL;
    Py_RETURN_NONE;
}

/* ---- stackup ------------------------------------------------------------------------------------- */

static PyObject *stackup_create(PyObject *module, PyObject *layers)
{
    core_state *state = core_of(module);
    lstub_stackup *stackup = NULL;
    core_gather gather;
    lstub_error err;
    int done = core_gather_take(state, layers, SHAPE_LAYER, "layers", &gather);
    LSTUB_INIT(err);
    if (done == 0)
        done = core_done(state, lstub_stackup_create(gather.items, gather.count, sizeof(lstub_layer), NULL, &stackup, &err),
                         &err, "Stackup", 1, 1);
    core_gather_free(&gather);
    return done < 0 ? NULL : core_handle_new(state, HANDLE_STACKUP, stackup);
}

static PyObject *layer_item(core_state *state, const void *stackup, size_t i)
{
    lstub_layer layer;
    lstub_error err;
    LSTUB_INIT(layer);
    LSTUB_INIT(err);
    if (core_done(state, lstub_stackup_layer(stackup, (int32_t)i, &layer, &err), &err, "Stackup.layers", 1, 1) < 0)
        return NULL;
    return core_unpack(SHAPE_LAYER, &layer);
}

static PyObject *layers_of(core_state *state, const lstub_stackup *stackup)
{
    return core_tuple(state, stackup, (size_t)lstub_stackup_count(stackup), layer_item);
}

static PyObject *stackup_layers(PyObject *module, PyObject *handle)
{
    core_state *state = core_of(module);
    const lstub_stackup *stackup = core_handle_get(state, handle, HANDLE_STACKUP);
    return stackup == NULL ? NULL : layers_of(state, stackup);
}

static PyObject *board_layers(PyObject *module, PyObject *handle)
{
    core_state *state = core_of(module);
    const lstub_board *board = core_handle_get(state, handle, HANDLE_BOARD);
    return board == NULL ? NULL : layers_of(state, lstub_board_stackup(board));
}

static PyObject *stackup_find(PyObject *module, PyObject *args)
{
    core_state *state = core_of(module);
    const lstub_stackup *stackup;
    PyObject *handle;
    const char *name;
    int32_t index = -1;
    lstub_error err;
    LSTUB_INIT(err);
    if (!PyArg_ParseTuple(args, "Os", &handle, &name))
        return NULL;
    stackup = core_handle_get(state, handle, HANDLE_STACKUP);
    if (stackup == NULL || core_done(state, lstub_stackup_find(stackup, name, &index, &err), &err, "Stackup.index", 1, 1) < 0)
        return NULL;
    return PyLong_FromLong(index);
}

static PyObject *copper_item(core_state *state, const void *stackup, size_t i)
{
    int32_t index = -1;
    lstub_error err;
    LSTUB_INIT(err);
    if (core_done(state, lstub_stackup_copper(stackup, (int32_t)i, &index, &err), &err, "Stackup.copper", 1, 1) < 0)
        return NULL;
    return PyLong_FromLong(index);
}

static PyObject *stackup_copper(PyObject *module, PyObject *handle)
{
    core_state *state = core_of(module);
    const lstub_stackup *stackup = core_handle_get(state, handle, HANDLE_STACKUP);
    if (stackup == NULL)
        return NULL;
    return core_tuple(state, stackup, (size_t)lstub_stackup_copper_count(stackup), copper_item);
}

static PyObject *stackup_depth(PyObject *module, PyObject *args)
{
    core_state *state = core_of(module);
    const lstub_stackup *stackup;
    PyObject *handle;
    double top, bottom;
    int index;
    lstub_error err;
    LSTUB_INIT(err);
    if (!PyArg_ParseTuple(args, "Oi", &handle, &index))
        return NULL;
    stackup = core_handle_get(state, handle, HANDLE_STACKUP);
    if (stackup == NULL ||
        core_done(state, lstub_stackup_depth(stackup, index, &top, &bottom, &err), &err, "Stackup.depth", 1, 1) < 0)
        return NULL;
    return Py_BuildValue("(dd)", top, bottom);
}

static PyObject *stackup_interval(PyObject *module, PyObject *args)
{
    core_state *state = core_of(module);
    const lstub_stackup *stackup;
    PyObject *handle, *from, *to;
    double top, bottom;
    lstub_interval interval;
    lstub_error err;
    LSTUB_INIT(interval);
    LSTUB_INIT(err);
    if (!PyArg_ParseTuple(args, "OOO", &handle, &from, &to))
        return NULL;
    stackup = core_handle_get(state, handle, HANDLE_STACKUP);
    if (stackup == NULL || core_number(state, from, "top", &top) < 0 || core_number(state, to, "bottom", &bottom) < 0 ||
        core_done(state, lstub_stackup_interval(stackup, top, bottom, &interval, &err), &err, "Stackup.interval", 1, 1) < 0)
        return NULL;
    return core_unpack(SHAPE_INTERVAL, &interval);
}

/* ---- via ----------------------------------------------------------------------------------------- */

static int take_via(core_state *state, PyObject *args, const lstub_stackup **stackup, const lstub_via **via)
{
    PyObject *handle, *rec;
    if (!PyArg_ParseTuple(args, "OO", &handle, &rec) ||
        (*stackup = core_handle_get(state, handle, HANDLE_STACKUP)) == NULL)
        return -1;
    *via = core_record_get(state, rec, SHAPE_VIA, "via");
    return *via == NULL ? -1 : 0;
}

static PyObject *via_check(PyObject *module, PyObject *args)
{
    core_state *state = core_of(module);
    const lstub_stackup *stackup;
    const lstub_via *via;
    lstub_error err;
    LSTUB_INIT(err);
    if (take_via(state, args, &stackup, &via) < 0 ||
        core_done(state, lstub_via_check(stackup, via, &err), &err, "Via", 1, 1) < 0)
        return NULL;
    Py_RETURN_NONE;
}

static PyObject *stub_item(core_state *state, const void *stubs, size_t i)
{
    (void)state;
    return core_unpack(SHAPE_STUB, (const lstub_stub *)stubs + i);
}

static PyObject *via_stubs(PyObject *module, PyObject *args)
{
    core_state *state = core_of(module);
    const lstub_stackup *stackup;
    const lstub_via *via;
    lstub_stub stubs[2];
    int32_t count = 0;
    lstub_error err;
    LSTUB_INIT(err);
    LSTUB_INIT(stubs[0]);
    LSTUB_INIT(stubs[1]);
    if (take_via(state, args, &stackup, &via) < 0 ||
        core_done(state, lstub_via_stubs(stackup, via, stubs, sizeof stubs[0], &count, &err), &err, "Via.stubs", 1, 1) < 0)
        return NULL;
    return core_tuple(state, stubs, (size_t)count, stub_item);
}

PyMethodDef core_geometry_methods[] = {
    {"permittivity", permittivity, METH_VARARGS, NULL},
    {"dielectric_check", dielectric_check, METH_O, NULL},
    {"stackup_create", stackup_create, METH_O, NULL},
    {"stackup_layers", stackup_layers, METH_O, NULL},
    {"board_layers", board_layers, METH_O, NULL},
    {"stackup_find", stackup_find, METH_VARARGS, NULL},
    {"stackup_copper", stackup_copper, METH_O, NULL},
    {"stackup_depth", stackup_depth, METH_VARARGS, NULL},
    {"stackup_interval", stackup_interval, METH_VARARGS, NULL},
    {"via_check", via_check, METH_VARARGS, NULL},
    {"via_stubs", via_stubs, METH_VARARGS, NULL},
    {NULL, NULL, 0, NULL},
};
