/* Python values to C and back, and what becomes of a status. */
#include "core.h"

#include <limits.h>
#include <stdarg.h>
#include <string.h>

static int wrong_type(PyObject *value, const char *name, const char *wanted)
{
    PyObject *type = PyType_GetQualName(Py_TYPE(value));
    if (type != NULL)
        PyErr_Format(PyExc_TypeError, "%s: must be %s, not %U", name, wanted, type);
    Py_XDECREF(type);
    return -1;
}

/* Arrays have __float__ too, and mean something else; those without a length are numbers. */
static int is_collection(PyObject *value)
{
    if (PyUnicode_Check(value) || PyBytes_Check(value))
        return 1;
    if (!PySequence_Check(value))
        return 0;
    if (PyObject_Length(value) >= 0)
        return 1;
    PyErr_Clear();
    return 0;
}

int core_number(core_state *state, PyObject *value, const char *name, double *out)
{
    if (PyFloat_Check(value)) {
        *out = PyFloat_AsDouble(value);
        return 0;
    }
    if (PyBool_Check(value) || is_collection(value))
        return wrong_type(value, name, "a number");
    *out = PyFloat_AsDouble(value);
    if (*out == -1.0 && PyErr_Occurred()) {
        if (PyErr_ExceptionMatches(PyExc_TypeError)) {
            PyErr_Clear();
            return wrong_type(value, name, "a number");
        }
        if (PyErr_ExceptionMatches(PyExc_OverflowError)) {
            PyErr_Clear();
            return core_bad_argument(state, name, "%s: too large for a double", name);
        }
        return -1;
    }
    return 0;
}

int core_int(core_state *state, PyObject *value, const char *name, int32_t *out)
{
    PyObject *index = NULL;
    long long number;
    int overflow = 0;
    if (!PyBool_Check(value))
        index = PyNumber_Index(value);
    if (index == NULL) {
        PyErr_Clear();
        return wrong_type(value, name, "an integer");
    }
    number = PyLong_AsLongLongAndOverflow(index, &overflow);
    Py_DECREF(index);
    if (overflow != 0 || number < INT32_MIN || number > INT32_MAX)
        return core_bad_argument(state, name, "%s = %S: must be >= -2147483648 and <= 2147483647", name, value);
    *out = (int32_t)number;
    return 0;
}

/* A message may have been cut in the middle of a character. */
PyObject *core_text(const char *text)
{
    return PyUnicode_DecodeUTF8(text, (Py_ssize_t)strlen(text), "replace");
}

static int raise(core_state *state, int32_t status, const char *field, int64_t index, PyObject *message)
{
    PyObject *error = NULL;
    if (message != NULL)
        error = PyObject_CallFunction(state->error_for, "isLO", (int)status, field, (long long)index, message);
    if (error != NULL)
        PyErr_SetObject((PyObject *)Py_TYPE(error), error);
    Py_XDECREF(error);
    return -1;
}

int core_bad_argument(core_state *state, const char *field, const char *format, ...)
{
    PyObject *message;
    va_list args;
    PyErr_Clear();      /* this says it better */
    va_start(args, format);
    message = PyUnicode_FromFormatV(format, args);
    va_end(args);
    raise(state, LSTUB_E_ARGUMENT, field, -1, message);
    Py_XDECREF(message);
    return -1;
}

int core_fail(core_state *state, int32_t status, const lstub_error *err)
{
    PyObject *message = core_text(err->message[0] ? err->message : lstub_status_name(status));
    raise(state, status, err->field, err->index, message);
    Py_XDECREF(message);
    return -1;
}

int core_done(core_state *state, int32_t status, const lstub_error *err, const char *what, Py_ssize_t count,
              Py_ssize_t total)
{
    PyObject *message, *done;
    if (status < 0)
        return core_fail(state, status, err);
    if (status != LSTUB_W_RANGE)
        return 0;
    message = core_text(err->status == LSTUB_W_RANGE ? err->message : "");
    if (message == NULL)
        return -1;
    done = PyObject_CallFunction(state->warn_range, "snnO", what, count, total, message);
    Py_DECREF(message);
    Py_XDECREF(done);
    return done != NULL ? 0 : -1;
}

PyObject *core_batch_result(int32_t status, const lstub_error *err)
{
    PyObject *message, *result;
    if (status == LSTUB_OK)
        Py_RETURN_NONE;
    message = core_text(err->message);
    if (message == NULL)
        return NULL;
    result = Py_BuildValue("(isLN)", (int)status, err->field, (long long)err->index, message);
    return result;
}
