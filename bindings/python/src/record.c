/*
** A record: an input struct filled once from Python values, with what it points to. It is made when the Python object
** is made, so that a batch only gathers structs. Immutable, hence free to be read without the GIL while referenced.
*/
#include "core.h"

#include <string.h>

#define ARRAYS_MAX 8        /* pointers with a count in one struct */

typedef struct record {
    PyObject_HEAD
    int       shape;
    int       arrays;
    PyObject *values;       /* owns the texts and records that the struct points to */
    void     *array[ARRAYS_MAX];
    union {
        lstub_dielectric    dielectric;
        lstub_conductor     conductor;
        lstub_layer         layer;
        lstub_via           via;
        lstub_signal        signal;
        lstub_criteria      criteria;
        lstub_capability    capability;
        lstub_model_options options;
        lstub_job           job;
        lstub_trace         trace;
        lstub_port          port;
        lstub_transition_options transition;
        lstub_search        search;
        lstub_loss_fit      loss_fit;
    } data;
} record;

static void record_dealloc(PyObject *self)
{
    record *rec = (record *)self;
    PyTypeObject *type = Py_TYPE(self);
    freefunc release = (freefunc)PyType_GetSlot(type, Py_tp_free);
    while (rec->arrays > 0)
        PyMem_Free(rec->array[--rec->arrays]);
    Py_XDECREF(rec->values);
    release(self);
    Py_DECREF(type);
}

static PyType_Slot record_slots[] = {{Py_tp_dealloc, record_dealloc}, {0, NULL}};
static PyType_Spec record_spec = {
    "libstub._core.Record", sizeof(record), 0,
    Py_TPFLAGS_DEFAULT | Py_TPFLAGS_DISALLOW_INSTANTIATION | Py_TPFLAGS_IMMUTABLETYPE, record_slots,
};

PyType_Spec *core_record_spec(void) { return &record_spec; }

/* ---- from Python --------------------------------------------------------------------------------- */

static int pack_layer_value(core_state *state, PyObject *item, const char *name, lstub_on_layer *out)
{
    PyObject *layer, *value;
    if (!PyTuple_Check(item) || !PyArg_ParseTuple(item, "OO", &layer, &value))
        return core_bad_argument(state, name, "%s: must be pairs of a layer and a value", name);
    return core_int(state, layer, name, &out->layer) < 0 ? -1 : core_number(state, value, name, &out->value);
}

static int pack_backdrill(core_state *state, PyObject *item, const char *name, lstub_backdrill *out)
{
    PyObject *side, *depth, *diameter;
    if (!PyTuple_Check(item) || !PyArg_ParseTuple(item, "OOO", &side, &depth, &diameter))
        return core_bad_argument(state, name, "%s: must be side, depth and diameter", name);
    if (core_int(state, side, name, &out->side) < 0 || core_number(state, depth, name, &out->depth) < 0)
        return -1;
    return core_number(state, diameter, name, &out->diameter);
}

static int pack_point(core_state *state, PyObject *item, const char *name, double *out)
{
    PyObject *x, *y;
    if (!PyTuple_Check(item) || !PyArg_ParseTuple(item, "OO", &x, &y))
        return core_bad_argument(state, name, "%s: must be pairs of x and y", name);
    return core_number(state, x, name, &out[0]) < 0 ? -1 : core_number(state, y, name, &out[1]);
}

static int pack_span(core_state *state, PyObject *item, const char *name, int32_t *out)
{
    PyObject *from, *to;
    if (!PyTuple_Check(item) || !PyArg_ParseTuple(item, "OO", &from, &to))
        return core_bad_argument(state, name, "%s: must be pairs of layers", name);
    return core_int(state, from, name, &out[0]) < 0 ? -1 : core_int(state, to, name, &out[1]);
}

static int pack_item(core_state *state, PyObject *item, const core_member *member, void *array, size_t i)
{
    switch (member->type) {
    case 'D': return core_number(state, item, member->name, (double *)array + i);
    case 'I': return core_int(state, item, member->name, (int32_t *)array + i);
    case 'P': return pack_point(state, item, member->name, (double *)array + 2 * i);
    case 'S': return pack_span(state, item, member->name, (int32_t *)array + 2 * i);
    case 'L': return pack_layer_value(state, item, member->name, (lstub_on_layer *)array + i);
    default:  return pack_backdrill(state, item, member->name, (lstub_backdrill *)array + i);
    }
}

static size_t item_size(char type)
{
    return type == 'D' ? sizeof(double) : type == 'P' ? 2 * sizeof(double) : type == 'I' ? sizeof(int32_t)
         : type == 'S' ? 2 * sizeof(int32_t) : type == 'L' ? sizeof(lstub_on_layer) : sizeof(lstub_backdrill);
}

static int pack_array(core_state *state, record *rec, const core_member *member, PyObject *value)
{
    char *base = (char *)&rec->data;
    size_t count, i;
    void *array;
    if (!PyTuple_Check(value))
        return core_bad_argument(state, member->name, "%s: must be a tuple", member->name);
    count = (size_t)PyTuple_Size(value);
    if (count == 0)
        return 0;
    if (rec->arrays == ARRAYS_MAX || (array = PyMem_Calloc(count, item_size(member->type))) == NULL) {
        PyErr_NoMemory();
        return -1;
    }
    rec->array[rec->arrays++] = array;
    for (i = 0; i < count; i++)
        if (pack_item(state, PyTuple_GetItem(value, (Py_ssize_t)i), member, array, i) < 0)
            return -1;
    memcpy(base + member->offset, &array, sizeof array);
    if (member->type == 'S') {      /* as many as there are points, which have come before */
        int32_t points;
        memcpy(&points, base + member->count_offset, sizeof points);
        if (points < 0 || (size_t)points != count)
            return core_bad_argument(state, member->name, "%s: must be as many as there are points", member->name);
    } else if (member->type == 'P') {
        int32_t points = (int32_t)count;
        memcpy(base + member->count_offset, &points, sizeof points);
    } else
        memcpy(base + member->count_offset, &count, sizeof count);
    return 0;
}

static int pack_four(core_state *state, PyObject *value, const char *name, double *out)
{
    int i;
    if (!PyTuple_Check(value) || PyTuple_Size(value) != 4)
        return core_bad_argument(state, name, "%s: must be a tuple of four numbers", name);
    for (i = 0; i < 4; i++)
        if (core_number(state, PyTuple_GetItem(value, i), name, &out[i]) < 0)
            return -1;
    return 0;
}

static const char *pack_text(core_state *state, PyObject *value, const char *name)
{
    Py_ssize_t size = 0;
    const char *text;
    if (!PyUnicode_Check(value)) {
        PyErr_Format(PyExc_TypeError, "%s: must be text", name);
        return NULL;
    }
    text = PyUnicode_AsUTF8AndSize(value, &size);
    if (text != NULL && strlen(text) != (size_t)size) {
        core_bad_argument(state, name, "%s: must not hold a null character", name);
        return NULL;
    }
    return text;
}

static int pack_member(core_state *state, record *rec, const core_member *member, PyObject *value)
{
    void *at = (char *)&rec->data + member->offset;
    const void *pointer = NULL;
    switch (member->type) {
    case 'd': return core_number(state, value, member->name, at);
    case 'i': return core_int(state, value, member->name, at);
    case 'E': return pack_four(state, value, member->name, at);
    case 's':
        if ((pointer = pack_text(state, value, member->name)) == NULL)
            return -1;
        break;
    case 'r':
        if (core_record_optional(state, value, member->shape, member->name, &pointer) < 0)
            return -1;
        break;
    default: return pack_array(state, rec, member, value);
    }
    memcpy(at, &pointer, sizeof pointer);
    return 0;
}

PyObject *core_record_new(core_state *state, int shape, PyObject *values)
{
    const core_shape *table = core_shape_of(shape);
    record *rec;
    size_t i;
    if (shape >= SHAPE_INPUTS || (size_t)PyTuple_Size(values) != table->members) {
        core_bad_argument(state, table->name, "%s: %d values wanted", table->name, (int)table->members);
        return NULL;
    }
    rec = PyObject_New(record, (PyTypeObject *)state->record_type);
    if (rec == NULL)
        return NULL;
    rec->shape = shape;
    rec->arrays = 0;
    Py_INCREF(values);
    rec->values = values;
    memset(&rec->data, 0, sizeof rec->data);
    lstub_init(&rec->data, table->size);
    for (i = 0; i < table->members; i++)
        if (pack_member(state, rec, &table->member[i], PyTuple_GetItem(values, (Py_ssize_t)i)) < 0) {
            Py_DECREF(rec);
            return NULL;
        }
    return (PyObject *)rec;
}

const void *core_record_get(core_state *state, PyObject *object, int shape, const char *name)
{
    if (Py_TYPE(object) != (PyTypeObject *)state->record_type || ((record *)object)->shape != shape) {
        PyErr_Format(PyExc_TypeError, "%s: must be a record of a %s", name, core_shape_of(shape)->name);
        return NULL;
    }
    return &((record *)object)->data;
}

int core_record_optional(core_state *state, PyObject *object, int shape, const char *name, const void **out)
{
    *out = object == Py_None ? NULL : core_record_get(state, object, shape, name);
    return *out == NULL && object != Py_None ? -1 : 0;
}

/* ---- many ---------------------------------------------------------------------------------------- */

int core_gather_take(core_state *state, PyObject *records, int shape, const char *name, core_gather *out)
{
    size_t size = core_shape_of(shape)->size, i;
    int single = Py_TYPE(records) == (PyTypeObject *)state->record_type;
    memset(out, 0, sizeof *out);
    out->keep = single ? PyTuple_Pack(1, records) : PySequence_Tuple(records);
    if (out->keep == NULL)
        return -1;
    out->count = (size_t)PyTuple_Size(out->keep);
    out->stride = single ? 0 : size;
    out->items = PyMem_Calloc(out->count ? out->count : 1, size);
    if (out->items == NULL) {
        PyErr_NoMemory();
        return -1;
    }
    for (i = 0; i < out->count; i++) {
        const void *data = core_record_get(state, PyTuple_GetItem(out->keep, (Py_ssize_t)i), shape, name);
        if (data == NULL)
            return -1;
        memcpy((char *)out->items + i * size, data, size);
    }
    return 0;
}

void core_gather_free(core_gather *gather)
{
    PyMem_Free(gather->items);
    Py_CLEAR(gather->keep);
    gather->items = NULL;
}
