/* Transitions: the whole via as a network. */
#include "core.h"

static PyObject *transition_create(PyObject *module, PyObject *args)
{
    core_state *state = core_of(module);
    PyObject *stackup, *via, *ports, *options;
    const lstub_stackup *board;
    const void *geometry, *choice;
    core_gather gather = {0};
    lstub_transition *transition = NULL;
    int32_t status;
    lstub_error err;
    int done = -1;
    LSTUB_INIT(err);
    if (!PyArg_ParseTuple(args, "OOOO", &stackup, &via, &ports, &options))
        return NULL;
    board = core_handle_get(state, stackup, HANDLE_STACKUP);
    geometry = board ? core_record_get(state, via, SHAPE_VIA, "via") : NULL;
    choice = geometry ? core_record_get(state, options, SHAPE_TRANSITION, "options") : NULL;
    if (choice == NULL)
        return NULL;
    if (core_gather_take(state, ports, SHAPE_PORT, "ports", &gather) == 0) {
        Py_BEGIN_ALLOW_THREADS
        status = lstub_transition_create(board, geometry, gather.items, gather.count, sizeof(lstub_port), choice, NULL, &transition, &err);
        Py_END_ALLOW_THREADS
        done = core_done(state, status, &err, "Transition", 1, 1);
    }
    core_gather_free(&gather);
    if (done < 0) {
        lstub_transition_destroy(transition);
        return NULL;
    }
    return core_handle_new(state, HANDLE_TRANSITION, transition);
}

static PyObject *reference_item(core_state *state, const void *transition, size_t i)
{
    double z_ref = 0.0;
    lstub_error err;
    LSTUB_INIT(err);
    if (core_done(state, lstub_transition_reference(transition, (int32_t)i, &z_ref, &err), &err, "Transition.reference", 1, 1) < 0)
        return NULL;
    return PyFloat_FromDouble(z_ref);
}

static PyObject *transition_reference(PyObject *module, PyObject *handle)
{
    core_state *state = core_of(module);
    const lstub_transition *transition = core_handle_get(state, handle, HANDLE_TRANSITION);
    return transition == NULL ? NULL : core_tuple(state, transition, (size_t)lstub_transition_ports(transition), reference_item);
}

static PyObject *transition_remarks(PyObject *module, PyObject *handle)
{
    const lstub_transition *transition = core_handle_get(core_of(module), handle, HANDLE_TRANSITION);
    return transition == NULL ? NULL : PyLong_FromLong(lstub_transition_remarks(transition));
}

/* transition_s(transition, f, out): ports times ports complex numbers for each frequency */
static PyObject *transition_s(PyObject *module, PyObject *args)
{
    core_state *state = core_of(module);
    PyObject *handle, *f, *to;
    core_buffer freq = {0}, out = {0};
    const lstub_transition *transition;
    int32_t status, *each = NULL;
    size_t ports, i;
    Py_ssize_t beyond = 0;
    lstub_error err;
    int done = -1;
    LSTUB_INIT(err);
    if (!PyArg_ParseTuple(args, "OOO", &handle, &f, &to))
        return NULL;
    transition = core_handle_get(state, handle, HANDLE_TRANSITION);
    ports = (size_t)lstub_transition_ports(transition);
    if (transition == NULL || core_buffer_read(f, "f", &freq) < 0 ||
        core_buffer_write(to, "out", 'Z', freq.count * ports * ports, &out) < 0 || core_buffers_apart(&freq, &out, "out") < 0)
        goto end;
    each = PyMem_Calloc(freq.count + 1, sizeof *each);
    if (each == NULL) {
        PyErr_NoMemory();
        goto end;
    }
    Py_BEGIN_ALLOW_THREADS
    status = lstub_transition_s(transition, freq.data, freq.count, out.data, each, &err);
    Py_END_ALLOW_THREADS
    for (i = 0; i < freq.count; i++)
        beyond += each[i] == LSTUB_W_RANGE;
    done = core_done(state, status, &err, "Transition.s", beyond, (Py_ssize_t)freq.count);
end:
    PyMem_Free(each);
    core_buffer_free(&freq);
    core_buffer_free(&out);
    if (done < 0)
        return NULL;
    Py_RETURN_NONE;
}

static PyObject *notch_item(core_state *state, const void *notches, size_t i)
{
    (void)state;
    return core_unpack(SHAPE_NOTCH, (const lstub_notch *)notches + i);
}

/* transition_notches(transition, mode, to, from, f_max) */
static PyObject *transition_notches(PyObject *module, PyObject *args)
{
    core_state *state = core_of(module);
    PyObject *handle, *limit, *seen, *driven, *tuple = NULL;
    const lstub_transition *transition;
    lstub_notch *notches = NULL;
    size_t capacity = 16, count = 0, i;
    double f_max;
    int32_t to, from, status;
    int mode;
    lstub_error err;
    LSTUB_INIT(err);
    if (!PyArg_ParseTuple(args, "OiOOO", &handle, &mode, &seen, &driven, &limit))
        return NULL;
    transition = core_handle_get(state, handle, HANDLE_TRANSITION);
    if (transition == NULL || core_int(state, seen, "to", &to) < 0 || core_int(state, driven, "from_", &from) < 0 ||
        core_number(state, limit, "up_to", &f_max) < 0)
        return NULL;
    do {
        capacity = count > capacity ? count : capacity;
        PyMem_Free(notches);
        notches = PyMem_Calloc(capacity, sizeof *notches);
        if (notches == NULL)
            return PyErr_NoMemory();
        for (i = 0; i < capacity; i++)
            LSTUB_INIT(notches[i]);
        Py_BEGIN_ALLOW_THREADS
        status = lstub_transition_notches(transition, mode, to, from, f_max, notches, capacity, sizeof notches[0], &count, &err);
        Py_END_ALLOW_THREADS
    } while (status == LSTUB_W_CAPACITY && count > capacity);
    if (core_done(state, status, &err, "Transition.notches", 1, 1) == 0)
        tuple = core_tuple(state, notches, count < capacity ? count : capacity, notch_item);
    PyMem_Free(notches);
    return tuple;
}

PyMethodDef core_transition_methods[] = {
    {"transition_create", transition_create, METH_VARARGS, NULL},
    {"transition_reference", transition_reference, METH_O, NULL},
    {"transition_remarks", transition_remarks, METH_O, NULL},
    {"transition_s", transition_s, METH_VARARGS, NULL},
    {"transition_notches", transition_notches, METH_VARARGS, NULL},
    {NULL, NULL, 0, NULL},
};
