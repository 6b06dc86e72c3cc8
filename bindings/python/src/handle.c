/* One type for the library's handles: immutable, destroyed with the last reference. */
#include "core.h"

typedef struct handle {
    PyObject_HEAD
    int   kind;
    void *pointer;
} handle;

static const char *const kinds[] = {"stackup", "model", "plan", "rules", "board", "transition", "touchstone"};

static void destroy(int kind, void *pointer)
{
    switch (kind) {
    case HANDLE_STACKUP: lstub_stackup_destroy(pointer); break;
    case HANDLE_MODEL:   lstub_model_destroy(pointer); break;
    case HANDLE_PLAN:    lstub_plan_destroy(pointer); break;
    case HANDLE_RULES:   lstub_rules_destroy(pointer); break;
    case HANDLE_TRANSITION: lstub_transition_destroy(pointer); break;
    case HANDLE_TOUCHSTONE: lstub_touchstone_destroy(pointer); break;
    default:             lstub_board_destroy(pointer); break;
    }
}

static void handle_dealloc(PyObject *self)
{
    PyTypeObject *type = Py_TYPE(self);
    freefunc release = (freefunc)PyType_GetSlot(type, Py_tp_free);
    destroy(((handle *)self)->kind, ((handle *)self)->pointer);
    release(self);
    Py_DECREF(type);
}

static PyObject *handle_repr(PyObject *self)
{
    return PyUnicode_FromFormat("<libstub %s handle>", kinds[((handle *)self)->kind]);
}

static PyType_Slot handle_slots[] = {{Py_tp_dealloc, handle_dealloc}, {Py_tp_repr, handle_repr}, {0, NULL}};
static PyType_Spec handle_spec = {
    "libstub._core.Handle", sizeof(handle), 0,
    Py_TPFLAGS_DEFAULT | Py_TPFLAGS_DISALLOW_INSTANTIATION | Py_TPFLAGS_IMMUTABLETYPE, handle_slots,
};

PyType_Spec *core_handle_spec(void) { return &handle_spec; }

PyObject *core_handle_new(core_state *state, int kind, void *pointer)
{
    handle *self = PyObject_New(handle, (PyTypeObject *)state->handle_type);
    if (self == NULL) {
        destroy(kind, pointer);
        return NULL;
    }
    self->kind = kind;
    self->pointer = pointer;
    return (PyObject *)self;
}

void *core_handle_get(core_state *state, PyObject *object, int kind)
{
    if (Py_TYPE(object) != (PyTypeObject *)state->handle_type || ((handle *)object)->kind != kind) {
        PyErr_Format(PyExc_TypeError, "must be a %s handle", kinds[kind]);
        return NULL;
    }
    return ((handle *)object)->pointer;
}
