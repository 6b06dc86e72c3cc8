/* Traces, and the surface of their copper. */
#include "core.h"

/* Two complex arrays of as many values as there are frequencies. */
typedef struct pair_of_arrays {
    core_buffer freq, to[2];
} pair_of_arrays;

static int take_arrays(pair_of_arrays *a, PyObject *f, PyObject *const *to, const char *const *names, int count)
{
    int i;
    if (core_buffer_read(f, "f", &a->freq) < 0)
        return -1;
    for (i = 0; i < count; i++)
        if (core_buffer_write(to[i], names[i], 'Z', a->freq.count, &a->to[i]) < 0 ||
            core_buffers_apart(&a->freq, &a->to[i], names[i]) < 0)
            return -1;
    return 0;
}

static void free_arrays(pair_of_arrays *a)
{
    core_buffer_free(&a->freq);
    core_buffer_free(&a->to[0]);
    core_buffer_free(&a->to[1]);
}

static PyObject *surface_impedance(PyObject *module, PyObject *args)
{
    core_state *state = core_of(module);
    static const char *const names[] = {"z"};
    PyObject *conductor, *f, *to[1];
    pair_of_arrays a = {{0}, {{0}, {0}}};
    const void *data;
    int32_t status;
    lstub_error err;
    int done = -1;
    LSTUB_INIT(err);
    if (!PyArg_ParseTuple(args, "OOO", &conductor, &f, &to[0]))
        return NULL;
    data = core_record_get(state, conductor, SHAPE_CONDUCTOR, "conductor");
    if (data != NULL && take_arrays(&a, f, to, names, 1) == 0) {
        Py_BEGIN_ALLOW_THREADS
        status = lstub_conductor_surface_impedance(data, a.freq.data, a.freq.count, a.to[0].data, &err);
        Py_END_ALLOW_THREADS
        done = core_done(state, status, &err, "Conductor.surface_impedance", 1, 1);
    }
    free_arrays(&a);
    if (done < 0)
        return NULL;
    Py_RETURN_NONE;
}

static PyObject *trace_line(PyObject *module, PyObject *args)
{
    core_state *state = core_of(module);
    static const char *const names[] = {"z", "gamma"};
    PyObject *trace, *f, *to[2];
    pair_of_arrays a = {{0}, {{0}, {0}}};
    const void *data;
    int32_t status;
    lstub_error err;
    int done = -1;
    LSTUB_INIT(err);
    if (!PyArg_ParseTuple(args, "OOOO", &trace, &f, &to[0], &to[1]))
        return NULL;
    data = core_record_get(state, trace, SHAPE_TRACE, "trace");
    if (data != NULL && take_arrays(&a, f, to, names, 2) == 0) {
        Py_BEGIN_ALLOW_THREADS
        status = lstub_trace_line(data, a.freq.data, a.freq.count, a.to[0].data, a.to[1].data, &err);
        Py_END_ALLOW_THREADS
        done = core_done(state, status, &err, "line", 1, 1);
    }
    free_arrays(&a);
    if (done < 0)
        return NULL;
    Py_RETURN_NONE;
}

/* Whether the values are within their ranges: the library says so where they are used, so use them once. What lies outside the
** stated range of the model is for line() to say. */
static PyObject *trace_check(PyObject *module, PyObject *trace)
{
    core_state *state = core_of(module);
    const void *data = core_record_get(state, trace, SHAPE_TRACE, "trace");
    double f = 1e9, z[2];
    int32_t status;
    lstub_error err;
    LSTUB_INIT(err);
    if (data == NULL)
        return NULL;
    status = lstub_trace_line(data, &f, 1, z, NULL, &err);
    if (status < 0) {
        core_fail(state, status, &err);
        return NULL;
    }
    Py_RETURN_NONE;
}

PyMethodDef core_trace_methods[] = {
    {"surface_impedance", surface_impedance, METH_VARARGS, NULL},
    {"trace_line", trace_line, METH_VARARGS, NULL},
    {"trace_check", trace_check, METH_O, NULL},
    {NULL, NULL, 0, NULL},
};
