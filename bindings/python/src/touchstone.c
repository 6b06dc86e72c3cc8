/* Touchstone files: read from paths, bytes and file objects, written to paths and file objects. */
#include "core.h"

#include <string.h>

/* ---- file objects, which are Python's: called with the GIL, while the library runs without it ------ */

typedef struct stream {
    PyThreadState *thread;
    PyObject      *call;          /* its read or write */
} stream;

/* An exception waits in the thread's state until the call has returned. */
static size_t read_some(void *user, void *buffer, size_t bytes)
{
    stream *s = user;
    Py_buffer view;
    size_t count = bytes + 1;                       /* cannot be read */
    PyObject *chunk;
    PyEval_RestoreThread(s->thread);
    chunk = PyObject_CallFunction(s->call, "n", (Py_ssize_t)bytes);
    if (chunk != NULL && PyUnicode_Check(chunk))
        PyErr_SetString(PyExc_TypeError, "file: read() gives text: open the file in binary mode");
    else if (chunk != NULL && PyObject_GetBuffer(chunk, &view, PyBUF_SIMPLE) == 0) {
        if ((size_t)view.len > bytes)
            PyErr_Format(PyExc_ValueError, "file: read(%zd) gave %zd bytes", (Py_ssize_t)bytes, view.len);
        else {
            memcpy(buffer, view.buf, (size_t)view.len);
            count = (size_t)view.len;
        }
        PyBuffer_Release(&view);
    }
    Py_XDECREF(chunk);
    s->thread = PyEval_SaveThread();
    return count;
}

/* A raw file may take a part only and say how much. */
static int32_t write_all(void *user, const void *bytes, size_t count)
{
    stream *s = user;
    const char *at = bytes;
    PyEval_RestoreThread(s->thread);
    while (count > 0) {
        PyObject *chunk = PyBytes_FromStringAndSize(at, (Py_ssize_t)count), *taken = NULL;
        Py_ssize_t done = -1;
        if (chunk != NULL)
            taken = PyObject_CallFunctionObjArgs(s->call, chunk, NULL);
        if (taken != NULL)
            done = PyLong_AsSsize_t(taken);
        Py_XDECREF(chunk);
        Py_XDECREF(taken);
        if (PyErr_Occurred())
            break;
        if (done < 1 || (size_t)done > count) {
            PyErr_Format(PyExc_OSError, "file: write() of %zd bytes took %zd", (Py_ssize_t)count, done);
            break;
        }
        at += done;
        count -= (size_t)done;
    }
    s->thread = PyEval_SaveThread();
    return count > 0;
}

/* ---- reading ------------------------------------------------------------------------------------- */

static PyObject *file_of(core_state *state, int32_t status, const lstub_error *err, lstub_touchstone *file)
{
    if (PyErr_Occurred() || core_done(state, status, err, "Touchstone", 1, 1) < 0) {
        lstub_touchstone_destroy(file);
        return NULL;
    }
    return core_handle_new(state, HANDLE_TOUCHSTONE, file);
}

static PyObject *touchstone_load(PyObject *module, PyObject *args)
{
    core_state *state = core_of(module);
    lstub_touchstone *file = NULL;
    PyObject *number;
    const char *path;
    int32_t ports, status;
    lstub_error err;
    LSTUB_INIT(err);
    if (!PyArg_ParseTuple(args, "yO", &path, &number) || core_int(state, number, "ports", &ports) < 0)
        return NULL;
    Py_BEGIN_ALLOW_THREADS
    status = lstub_touchstone_load(path, ports, NULL, &file, &err);
    Py_END_ALLOW_THREADS
    return file_of(state, status, &err, file);
}

static PyObject *touchstone_parse(PyObject *module, PyObject *args)
{
    core_state *state = core_of(module);
    lstub_touchstone *file = NULL;
    PyObject *number;
    Py_buffer text;
    int32_t ports, status = LSTUB_OK;
    lstub_error err;
    int done;
    LSTUB_INIT(err);
    if (!PyArg_ParseTuple(args, "y*O", &text, &number))
        return NULL;
    done = core_int(state, number, "ports", &ports);
    if (done == 0) {
        Py_BEGIN_ALLOW_THREADS
        status = lstub_touchstone_parse(text.buf, (size_t)text.len, ports, NULL, &file, &err);
        Py_END_ALLOW_THREADS
    }
    PyBuffer_Release(&text);
    return done < 0 ? NULL : file_of(state, status, &err, file);
}

/* touchstone_read(read, ports): read is a file object's method */
static PyObject *touchstone_read(PyObject *module, PyObject *args)
{
    core_state *state = core_of(module);
    lstub_touchstone *file = NULL;
    lstub_source source;
    PyObject *number;
    stream user = {NULL, NULL};
    int32_t ports, status;
    lstub_error err;
    LSTUB_INIT(source);
    LSTUB_INIT(err);
    if (!PyArg_ParseTuple(args, "OO", &user.call, &number) || core_int(state, number, "ports", &ports) < 0)
        return NULL;
    source.read = read_some;
    source.user = &user;
    user.thread = PyEval_SaveThread();
    status = lstub_touchstone_read(&source, ports, NULL, &file, &err);
    PyEval_RestoreThread(user.thread);
    return file_of(state, status, &err, file);
}

static int file_data(core_state *state, PyObject *handle, lstub_touchstone_data *data)
{
    const lstub_touchstone *file = core_handle_get(state, handle, HANDLE_TOUCHSTONE);
    lstub_error err;
    LSTUB_INIT(*data);
    LSTUB_INIT(err);
    return file == NULL ? -1 : core_done(state, lstub_touchstone_get(file, data, &err), &err, "Touchstone", 1, 1);
}

static PyObject *reference_item(core_state *state, const void *data, size_t i)
{
    (void)state;
    return PyFloat_FromDouble(((const lstub_touchstone_data *)data)->reference[i]);
}

static PyObject *row_item(core_state *state, const void *data, size_t i)
{
    const lstub_touchstone_row *row = &((const lstub_touchstone_data *)data)->rows[i];
    (void)state;
    return Py_BuildValue("(iii)", (int)row->kind, (int)row->port, (int)row->partner);
}

static PyObject *comment_item(core_state *state, const void *data, size_t i)
{
    (void)state;
    return core_text(((const lstub_touchstone_data *)data)->comments[i]);
}

/* touchstone_get(file) -> numbers, points, noise points, references, rows or None, comments */
static PyObject *touchstone_get(PyObject *module, PyObject *handle)
{
    core_state *state = core_of(module);
    lstub_touchstone_data d;
    PyObject *reference, *rows, *comments;
    if (file_data(state, handle, &d) < 0)
        return NULL;
    reference = core_tuple(state, &d, (size_t)d.ports, reference_item);
    rows = d.rows != NULL ? core_tuple(state, &d, (size_t)d.ports, row_item) : Py_NewRef(Py_None);
    comments = core_tuple(state, &d, d.comment_count, comment_item);
    if (reference != NULL && rows != NULL && comments != NULL)
        return Py_BuildValue("((iiiiiii)nnNNN)", (int)d.version, (int)d.ports, (int)d.parameter, (int)d.format, (int)d.unit, (int)d.matrix,
                             (int)d.order, (Py_ssize_t)d.points, (Py_ssize_t)d.noise_points, reference, rows, comments);
    Py_XDECREF(reference);
    Py_XDECREF(rows);
    Py_XDECREF(comments);
    return NULL;
}

/* touchstone_copy(file, freq, data) */
static PyObject *touchstone_copy(PyObject *module, PyObject *args)
{
    core_state *state = core_of(module);
    PyObject *handle, *f, *s;
    core_buffer freq = {0}, data = {0};
    lstub_touchstone_data d;
    size_t count;
    int done = -1;
    if (!PyArg_ParseTuple(args, "OOO", &handle, &f, &s) || file_data(state, handle, &d) < 0)
        return NULL;
    count = d.points * (size_t)d.ports * (size_t)d.ports;
    if (core_buffer_write(f, "frequency", 'd', d.points, &freq) == 0 && core_buffer_write(s, "data", 'Z', count, &data) == 0) {
        if (d.points > 0) {
            memcpy(freq.data, d.freq, d.points * sizeof(double));
            memcpy(data.data, d.data, count * 16);
        }
        done = 0;
    }
    core_buffer_free(&freq);
    core_buffer_free(&data);
    if (done < 0)
        return NULL;
    Py_RETURN_NONE;
}

/* ---- writing ------------------------------------------------------------------------------------- */

typedef struct writing {
    lstub_touchstone_data data;
    core_buffer           freq, values, reference;
    lstub_touchstone_row  rows[LSTUB_PORTS_MAX];
    const char          **comments;
} writing;

static void writing_free(writing *w)
{
    core_buffer_free(&w->freq);
    core_buffer_free(&w->values);
    core_buffer_free(&w->reference);
    PyMem_Free(w->comments);
}

static int take_rows(core_state *state, writing *w, PyObject *rows)
{
    Py_ssize_t i;
    if (rows == Py_None)
        return 0;
    if (!PyTuple_Check(rows) || PyTuple_Size(rows) != w->data.ports)
        return core_bad_argument(state, "rows", "rows: must be as many as ports (%d)", (int)w->data.ports);
    for (i = 0; i < PyTuple_Size(rows); i++) {
        PyObject *item = PyTuple_GetItem(rows, i), *part[3];
        int32_t *to[3] = {&w->rows[i].kind, &w->rows[i].port, &w->rows[i].partner};
        int k;
        if (!PyTuple_Check(item) || !PyArg_ParseTuple(item, "OOO", &part[0], &part[1], &part[2]))
            return core_bad_argument(state, "rows", "rows[%zd]: must be kind, port and partner", i);
        for (k = 0; k < 3; k++)
            if (core_int(state, part[k], "rows", to[k]) < 0)
                return -1;
    }
    w->data.rows = w->rows;
    return 0;
}

/* The tuple owns the texts, and the caller holds it. */
static int take_comments(core_state *state, writing *w, PyObject *comments)
{
    Py_ssize_t count = PyTuple_Check(comments) ? PyTuple_Size(comments) : -1, i, size;
    if (count < 0)
        return core_bad_argument(state, "comments", "comments: must be a tuple");
    w->comments = PyMem_Calloc((size_t)count + 1, sizeof *w->comments);
    if (w->comments == NULL) {
        PyErr_NoMemory();
        return -1;
    }
    for (i = 0; i < count; i++) {
        PyObject *text = PyTuple_GetItem(comments, i);
        w->comments[i] = PyUnicode_Check(text) ? PyUnicode_AsUTF8AndSize(text, &size) : NULL;
        if (w->comments[i] == NULL)
            return PyErr_Occurred() ? -1 : core_bad_argument(state, "comments", "comments[%zd]: must be text", i);
        if (strlen(w->comments[i]) != (size_t)size)
            return core_bad_argument(state, "comments", "comments[%zd]: must not hold a null character", i);
    }
    w->data.comments = w->comments;
    w->data.comment_count = (size_t)count;
    return 0;
}

/* ((version, ports, parameter, format, unit, matrix, order, digits), freq, data, references, rows or None, comments) */
static int take_writing(core_state *state, writing *w, PyObject *values)
{
    PyObject *arg[6];
    int32_t *to[8] = {&w->data.version, &w->data.ports, &w->data.parameter, &w->data.format, &w->data.unit, &w->data.matrix,
                      &w->data.order, &w->data.digits};
    Py_ssize_t i;
    LSTUB_INIT(w->data);
    if (!PyArg_ParseTuple(values, "OOOOOO", &arg[0], &arg[1], &arg[2], &arg[3], &arg[4], &arg[5]))
        return -1;
    if (!PyTuple_Check(arg[0]) || PyTuple_Size(arg[0]) != 8)
        return core_bad_argument(state, "numbers", "numbers: must be eight");
    for (i = 0; i < 8; i++)
        if (core_int(state, PyTuple_GetItem(arg[0], i), i == 7 ? "digits" : "numbers", to[i]) < 0)
            return -1;
    if (w->data.ports < 1 || w->data.ports > LSTUB_PORTS_MAX)
        return core_bad_argument(state, "ports", "data: %d ports: must be >= 1 and <= %d", (int)w->data.ports, LSTUB_PORTS_MAX);
    if (core_buffer_read(arg[1], "frequency", &w->freq) < 0 || core_buffer_complex(arg[2], "data", &w->values) < 0 ||
        core_buffer_read(arg[3], "reference", &w->reference) < 0)
        return -1;
    if (w->values.count != w->freq.count * (size_t)w->data.ports * (size_t)w->data.ports)
        return core_bad_argument(state, "data", "data: %zd matrices of %d ports wanted, one for each frequency",
                                 (Py_ssize_t)w->freq.count, (int)w->data.ports);
    if (w->reference.count != (size_t)w->data.ports)
        return core_bad_argument(state, "reference", "reference: %zd values: must be one, or as many as ports (%d)",
                                 (Py_ssize_t)w->reference.count, (int)w->data.ports);
    w->data.points = w->freq.count;
    w->data.freq = w->freq.data;
    w->data.data = w->values.data;
    w->data.reference = w->reference.data;
    return take_rows(state, w, arg[4]) < 0 ? -1 : take_comments(state, w, arg[5]);
}

/* touchstone_save(values, path) */
static PyObject *touchstone_save(PyObject *module, PyObject *args)
{
    core_state *state = core_of(module);
    PyObject *values;
    writing w = {{0}, {0}, {0}, {0}, {{0, 0, 0}}, NULL};
    const char *path;
    int32_t status;
    lstub_error err;
    int done;
    LSTUB_INIT(err);
    if (!PyArg_ParseTuple(args, "O!y", &PyTuple_Type, &values, &path))
        return NULL;
    done = take_writing(state, &w, values);
    if (done == 0) {
        Py_BEGIN_ALLOW_THREADS
        status = lstub_touchstone_save(&w.data, path, &err);
        Py_END_ALLOW_THREADS
        done = core_done(state, status, &err, "Touchstone.save", 1, 1);
    }
    writing_free(&w);
    if (done < 0)
        return NULL;
    Py_RETURN_NONE;
}

/* touchstone_write(values, write): write is a file object's method */
static PyObject *touchstone_write(PyObject *module, PyObject *args)
{
    core_state *state = core_of(module);
    PyObject *values;
    writing w = {{0}, {0}, {0}, {0}, {{0, 0, 0}}, NULL};
    stream user = {NULL, NULL};
    lstub_sink sink;
    int32_t status;
    lstub_error err;
    int done;
    LSTUB_INIT(sink);
    LSTUB_INIT(err);
    if (!PyArg_ParseTuple(args, "O!O", &PyTuple_Type, &values, &user.call))
        return NULL;
    done = take_writing(state, &w, values);
    if (done == 0) {
        sink.write = write_all;
        sink.user = &user;
        user.thread = PyEval_SaveThread();
        status = lstub_touchstone_write(&w.data, &sink, &err);
        PyEval_RestoreThread(user.thread);
        done = PyErr_Occurred() ? -1 : core_done(state, status, &err, "Touchstone.write", 1, 1);
    }
    writing_free(&w);
    if (done < 0)
        return NULL;
    Py_RETURN_NONE;
}

PyMethodDef core_touchstone_methods[] = {
    {"touchstone_load", touchstone_load, METH_VARARGS, NULL},
    {"touchstone_parse", touchstone_parse, METH_VARARGS, NULL},
    {"touchstone_read", touchstone_read, METH_VARARGS, NULL},
    {"touchstone_get", touchstone_get, METH_O, NULL},
    {"touchstone_copy", touchstone_copy, METH_VARARGS, NULL},
    {"touchstone_save", touchstone_save, METH_VARARGS, NULL},
    {"touchstone_write", touchstone_write, METH_VARARGS, NULL},
    {NULL, NULL, 0, NULL},
};
