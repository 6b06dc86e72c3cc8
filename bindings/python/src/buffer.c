/* Arrays through the buffer protocol, and an array of complex numbers for a Python without NumPy. */
#include "core.h"

#include <string.h>

static double nowhere[2];     /* what an empty buffer points to: never read or written */

static int get_view(PyObject *object, const char *name, int flags, core_buffer *out)
{
    PyObject *type, *value, *trace;
    memset(out, 0, sizeof *out);
    if (PyObject_GetBuffer(object, &out->view, flags) == 0) {
        out->held = 1;
        out->data = out->view.len > 0 ? out->view.buf : nowhere;
        return 0;
    }
    PyErr_Fetch(&type, &value, &trace);
    PyErr_NormalizeException(&type, &value, &trace);
    PyErr_Format(type, "%s: %S", name, value);
    Py_XDECREF(type);
    Py_XDECREF(value);
    Py_XDECREF(trace);
    return -1;
}

static int has_format(const core_buffer *buffer, const char *format, Py_ssize_t itemsize)
{
    const char *found = buffer->view.format ? buffer->view.format : "B";
    if (found[0] == '@')
        found++;
    return strcmp(found, format) == 0 && buffer->view.itemsize == itemsize;
}

static int refuse(core_buffer *buffer, const char *name, const char *wanted)
{
    PyErr_Format(PyExc_TypeError, "%s: must be a buffer of %s, not of format '%s'", name, wanted,
                 buffer->view.format ? buffer->view.format : "B");
    core_buffer_free(buffer);
    return -1;
}

static int aligned(core_buffer *buffer, const char *name, size_t bytes)
{
    if ((uintptr_t)buffer->data % bytes == 0)
        return 0;
    PyErr_Format(PyExc_TypeError, "%s: the buffer is not aligned to %d bytes", name, (int)bytes);
    core_buffer_free(buffer);
    return -1;
}

int core_buffer_read(PyObject *object, const char *name, core_buffer *out)
{
    if (get_view(object, name, PyBUF_C_CONTIGUOUS | PyBUF_FORMAT, out) < 0)
        return -1;
    if (!has_format(out, "d", (Py_ssize_t)sizeof(double)))
        return refuse(out, name, "float64 ('d')");
    out->count = (size_t)out->view.len / sizeof(double);
    return aligned(out, name, sizeof(double));
}

int core_buffer_complex(PyObject *object, const char *name, core_buffer *out)
{
    if (get_view(object, name, PyBUF_C_CONTIGUOUS | PyBUF_FORMAT, out) < 0)
        return -1;
    if (!has_format(out, "Zd", 16) && (!has_format(out, "d", (Py_ssize_t)sizeof(double)) || out->view.len % 16 != 0))
        return refuse(out, name, "complex128 ('Zd') or pairs of float64 ('d')");
    out->count = (size_t)out->view.len / 16;
    return aligned(out, name, sizeof(double));
}

int core_buffer_write(PyObject *object, const char *name, char type, size_t count, core_buffer *out)
{
    size_t bytes = sizeof(double);
    if (get_view(object, name, PyBUF_C_CONTIGUOUS | PyBUF_FORMAT | PyBUF_WRITABLE, out) < 0)
        return -1;
    if (type == 'i') {
        bytes = sizeof(int32_t);
        if (!has_format(out, "i", (Py_ssize_t)bytes))
            return refuse(out, name, "int32 ('i')");
    } else if (type == 'Z' && has_format(out, "Zd", 16)) {
        bytes = 16;
    } else if (!has_format(out, "d", (Py_ssize_t)bytes)) {
        return refuse(out, name, type == 'Z' ? "complex128 ('Zd') or pairs of float64 ('d')" : "float64 ('d')");
    } else if (type == 'Z') {
        bytes = 16;
    }
    if ((size_t)out->view.len != count * bytes) {
        PyErr_Format(PyExc_ValueError, "%s: holds %zd bytes: must hold %zd for %zd values", name, out->view.len,
                     (Py_ssize_t)(count * bytes), (Py_ssize_t)count);
        core_buffer_free(out);
        return -1;
    }
    out->count = count;
    return aligned(out, name, type == 'i' ? sizeof(int32_t) : sizeof(double));
}

int core_buffers_apart(const core_buffer *in, const core_buffer *out, const char *name)
{
    const char *a = in->data, *b = out->data;
    if (in->view.len == 0 || out->view.len == 0 || a + in->view.len <= b || b + out->view.len <= a)
        return 0;
    PyErr_Format(PyExc_ValueError, "%s: shares memory with another argument", name);
    return -1;
}

void core_buffer_free(core_buffer *buffer)
{
    if (buffer->held)
        PyBuffer_Release(&buffer->view);
    buffer->held = 0;
}

/* ---- complex array: exports "Zd", which NumPy reads as complex128 without a copy ------------------ */

#define DIMENSIONS_MAX 3

typedef struct complex_array {
    PyObject_HEAD
    Py_ssize_t count;
    int        dimensions;
    Py_ssize_t shape[DIMENSIONS_MAX], strides[DIMENSIONS_MAX];   /* strides in bytes */
    double    *data;          /* count pairs */
} complex_array;

static void complex_dealloc(PyObject *self)
{
    PyTypeObject *type = Py_TYPE(self);
    freefunc release = (freefunc)PyType_GetSlot(type, Py_tp_free);
    PyMem_Free(((complex_array *)self)->data);
    release(self);
    Py_DECREF(type);
}

static int complex_getbuffer(PyObject *self, Py_buffer *view, int flags)
{
    static char format[] = "Zd";
    complex_array *array = (complex_array *)self;
    if (PyBuffer_FillInfo(view, self, array->data, 16 * array->count, 0, flags) < 0)
        return -1;
    view->itemsize = 16;
    view->format = (flags & PyBUF_FORMAT) == PyBUF_FORMAT ? format : NULL;
    view->ndim = (flags & PyBUF_ND) == PyBUF_ND ? array->dimensions : 1;
    view->shape = (flags & PyBUF_ND) == PyBUF_ND ? array->shape : NULL;
    view->strides = (flags & PyBUF_STRIDES) == PyBUF_STRIDES ? array->strides : NULL;
    return 0;
}

static Py_ssize_t complex_length(PyObject *self) { return ((complex_array *)self)->shape[0]; }

/* What stands at a pair in dimension k: a number, or a list of what stands in the next. */
static PyObject *complex_at(const complex_array *array, const double *at, int k)
{
    PyObject *list;
    Py_ssize_t i;
    if (k == array->dimensions)
        return PyComplex_FromDoubles(at[0], at[1]);
    list = PyList_New(array->shape[k]);
    for (i = 0; list != NULL && i < array->shape[k]; i++) {
        PyObject *item = complex_at(array, at + i * (array->strides[k] / (Py_ssize_t)sizeof(double)), k + 1);
        if (item == NULL || PyList_SetItem(list, i, item) < 0)
            Py_CLEAR(list);
    }
    return list;
}

static PyObject *complex_item(PyObject *self, Py_ssize_t i)
{
    complex_array *array = (complex_array *)self;
    if (i < 0 || i >= array->shape[0]) {
        PyErr_SetString(PyExc_IndexError, "index out of range");
        return NULL;
    }
    return complex_at(array, array->data + i * (array->strides[0] / (Py_ssize_t)sizeof(double)), 1);
}

static PyObject *complex_shape(PyObject *self, void *unused)
{
    const complex_array *array = (complex_array *)self;
    PyObject *tuple = PyTuple_New(array->dimensions);
    int k;
    (void)unused;
    for (k = 0; tuple != NULL && k < array->dimensions; k++)
        if (PyTuple_SetItem(tuple, k, PyLong_FromSsize_t(array->shape[k])) < 0)
            Py_CLEAR(tuple);
    return tuple;
}

static PyObject *complex_tolist(PyObject *self, PyObject *unused)
{
    (void)unused;
    return PySequence_List(self);
}

static PyObject *complex_real_imag(PyObject *self, PyObject *unused)
{
    PyObject *view = PyMemoryView_FromObject(self), *bytes = NULL, *doubles = NULL;
    (void)unused;
    if (view != NULL)
        bytes = PyObject_CallMethod(view, "cast", "s", "B");
    if (bytes != NULL)
        doubles = PyObject_CallMethod(bytes, "cast", "s", "d");
    Py_XDECREF(view);
    Py_XDECREF(bytes);
    return doubles;
}

static PyObject *complex_repr(PyObject *self)
{
    return PyUnicode_FromFormat("ComplexArray(%zd values)", ((complex_array *)self)->count);
}

static PyMethodDef complex_methods[] = {
    {"tolist", complex_tolist, METH_NOARGS, "tolist($self, /)\n--\n\nThe values as a list of complex, or of lists of them."},
    {"real_imag", complex_real_imag, METH_NOARGS,
     "real_imag($self, /)\n--\n\nThe same memory as a memoryview of doubles: re, im, re, im ..."},
    {NULL, NULL, 0, NULL},
};

static PyGetSetDef complex_getset[] = {
    {"shape", complex_shape, NULL, "Lengths of its dimensions, one to three.", NULL},
    {NULL, NULL, NULL, NULL, NULL},
};

static const char complex_doc[] =
    "Complex numbers, as returned where NumPy is not installed. len(), indices and iteration give complex, of networks "
    "(n, p, p) the matrix of a frequency as lists; np.asarray() gives complex128 without a copy.";

static PyType_Slot complex_slots[] = {
    {Py_tp_dealloc, complex_dealloc}, {Py_tp_methods, complex_methods}, {Py_tp_getset, complex_getset},
    {Py_tp_repr, complex_repr},
    {Py_tp_doc, (void *)complex_doc}, {Py_bf_getbuffer, complex_getbuffer}, {Py_sq_length, complex_length},
    {Py_sq_item, complex_item}, {0, NULL},
};
static PyType_Spec complex_spec = {
    "libstub._core.ComplexArray", sizeof(complex_array), 0,
    Py_TPFLAGS_DEFAULT | Py_TPFLAGS_DISALLOW_INSTANTIATION | Py_TPFLAGS_IMMUTABLETYPE, complex_slots,
};

PyType_Spec *core_complex_spec(void) { return &complex_spec; }

static int take_shape(complex_array *array, PyObject *shape)
{
    Py_ssize_t count = 1, stride = 16;
    int tuple = PyTuple_Check(shape), k;
    array->dimensions = tuple ? (int)PyTuple_Size(shape) : 1;
    if (array->dimensions < 1 || array->dimensions > DIMENSIONS_MAX) {
        PyErr_Format(PyExc_ValueError, "shape: must have 1 to %d dimensions", DIMENSIONS_MAX);
        return -1;
    }
    for (k = array->dimensions - 1; k >= 0; k--) {
        Py_ssize_t n = PyLong_AsSsize_t(tuple ? PyTuple_GetItem(shape, k) : shape);
        if (n < 0) {
            if (!PyErr_Occurred())
                PyErr_SetString(PyExc_ValueError, "shape: must be >= 0");
            return -1;
        }
        array->shape[k] = n;
        array->strides[k] = stride;
        if (n > 0 && stride > PY_SSIZE_T_MAX / n) {
            PyErr_NoMemory();
            return -1;
        }
        count *= n;
        stride *= n > 0 ? n : 1;
    }
    array->count = count;
    return 0;
}

/* complex_array(count), or of a shape */
PyObject *core_complex_array(PyObject *module, PyObject *shape)
{
    complex_array *array = PyObject_New(complex_array, (PyTypeObject *)core_of(module)->complex_type);
    if (array == NULL)
        return NULL;
    array->data = NULL;
    if (take_shape(array, shape) < 0) {
        Py_DECREF(array);
        return NULL;
    }
    array->data = PyMem_Calloc((size_t)array->count + 1, 16);
    if (array->data == NULL) {
        Py_DECREF(array);
        return PyErr_NoMemory();
    }
    return (PyObject *)array;
}
