/*
** libstub._core: the C library as Python sees it. Private; the public names are those of the package around it.
**
** It converts, checks types and holds buffers, and nothing else: no numbers of its own, no choices. Structs cross in
** both directions by the tables in shapes.c, so that a member is named in one place.
*/
#ifndef LIBSTUB_PYTHON_CORE_H
#define LIBSTUB_PYTHON_CORE_H

#define Py_LIMITED_API 0x030B0000      /* Py_buffer is in the limited API from 3.11 on                  */
#define PY_SSIZE_T_CLEAN
#include <Python.h>
#include <stddef.h>
#include <stdint.h>

#include "libstub.h"
#include "libstub_ipc2581.h"

typedef struct core_state {            /* of the module; there are no globals                           */
    PyObject *handle_type, *record_type, *complex_type;
    PyObject *error_for;               /* libstub._errors.error_for(status, field, index, message)      */
    PyObject *warn_range;              /* libstub._errors.warn_range(what, count, total, message)       */
} core_state;

core_state *core_of(PyObject *module);

/* ---- values and failures (convert.c): 0 done, -1 with a Python exception set ---------------------- */

int core_number(core_state *state, PyObject *value, const char *name, double *out);
int core_int(core_state *state, PyObject *value, const char *name, int32_t *out);
PyObject *core_text(const char *text);
int core_bad_argument(core_state *state, const char *field, const char *format, ...);
int core_fail(core_state *state, int32_t status, const lstub_error *err);
/* What a status means in Python: an exception, or one warning that stands for `count` of `total` items. */
int core_done(core_state *state, int32_t status, const lstub_error *err, const char *what, Py_ssize_t count,
              Py_ssize_t total);
/* For batches, whose items are judged in Python: None, or (status, field, index, message). */
PyObject *core_batch_result(int32_t status, const lstub_error *err);

/* ---- structs (shapes.c, record.c) ---------------------------------------------------------------- */

enum {  /* inputs first */
    SHAPE_DIELECTRIC, SHAPE_CONDUCTOR, SHAPE_LAYER, SHAPE_VIA, SHAPE_SIGNAL, SHAPE_CRITERIA, SHAPE_CAPABILITY,
    SHAPE_OPTIONS, SHAPE_JOB, SHAPE_TRACE, SHAPE_PORT, SHAPE_TRANSITION, SHAPE_SEARCH, SHAPE_LOSS_FIT, SHAPE_INPUTS,
    SHAPE_INTERVAL = SHAPE_INPUTS, SHAPE_STUB, SHAPE_LINE, SHAPE_NOTCH, SHAPE_MARGIN, SHAPE_LIMIT, SHAPE_CUT,
    SHAPE_DECISION, SHAPE_GROUP, SHAPE_SUMMARY, SHAPE_HOLE, SHAPE_NOTICE, SHAPE_MEASURED, SHAPE_FIT, SHAPE_DEVIATION,
    SHAPE_COUNT
};

typedef struct core_member {
    const char *name;
    char        type;         /* d double, i int32, l int64, s text, r pointer to a struct, n struct inside,
                                 D doubles, I int32s, L values on layers, B back-drills (pointer and count),
                                 P points: two doubles each (pointer and an int32 count, which is a member too),
                                 S spans: two int32s each (pointer, and the same count), E four doubles inside */
    int         shape;        /* of r and n                                                             */
    size_t      offset, count_offset;
} core_member;

typedef struct core_shape {
    const char        *name;
    size_t             size, members;
    const core_member *member;
} core_shape;

const core_shape *core_shape_of(int shape);
int core_shape_named(core_state *state, const char *name);           /* -1 with an exception            */
PyObject *core_unpack(int shape, const void *data);                  /* a tuple in the order of the table */
/* A tuple of what item(state, from, i) gives for each i; null with an exception where one gives null. */
typedef PyObject *(*core_item)(core_state *state, const void *from, size_t i);
PyObject *core_tuple(core_state *state, const void *from, size_t count, core_item item);
/* Writes a column per member of count structs into writable buffers, one per member of the table. */
int core_columns(core_state *state, int shape, const void *data, size_t count, PyObject *columns);

PyType_Spec *core_record_spec(void);
PyObject *core_record_new(core_state *state, int shape, PyObject *values);
/* The struct of a record; null with an exception if it is not one of that shape. */
const void *core_record_get(core_state *state, PyObject *record, int shape, const char *name);
/* The same where None stands for a null pointer. */
int core_record_optional(core_state *state, PyObject *record, int shape, const char *name, const void **out);

typedef struct core_gather {  /* structs of many records side by side                                  */
    PyObject *keep;
    void     *items;
    size_t    count, stride;  /* stride 0: one record for all                                           */
} core_gather;

int core_gather_take(core_state *state, PyObject *records, int shape, const char *name, core_gather *out);
void core_gather_free(core_gather *gather);

/* ---- buffers (buffer.c) -------------------------------------------------------------------------- */

typedef struct core_buffer {
    void     *data;           /* never null while held                                                  */
    size_t    count;          /* values: doubles, complex numbers or int32s                             */
    int       held;
    Py_buffer view;
} core_buffer;

int core_buffer_read(PyObject *object, const char *name, core_buffer *out);              /* doubles         */
int core_buffer_complex(PyObject *object, const char *name, core_buffer *out);           /* Zd, or pairs of doubles */
/* type: d doubles, Z complex (as complex128, or as twice as many doubles), i int32 */
int core_buffer_write(PyObject *object, const char *name, char type, size_t count, core_buffer *out);
int core_buffers_apart(const core_buffer *in, const core_buffer *out, const char *name);
void core_buffer_free(core_buffer *buffer);

PyType_Spec *core_complex_spec(void);
PyObject *core_complex_array(PyObject *module, PyObject *count);

/* ---- handles (handle.c) -------------------------------------------------------------------------- */

enum { HANDLE_STACKUP, HANDLE_MODEL, HANDLE_PLAN, HANDLE_RULES, HANDLE_BOARD, HANDLE_TRANSITION, HANDLE_TOUCHSTONE };

PyType_Spec *core_handle_spec(void);
PyObject *core_handle_new(core_state *state, int kind, void *pointer);   /* takes the pointer over      */
void *core_handle_get(core_state *state, PyObject *object, int kind);    /* null with an exception      */

/* ---- functions, by part of the header ------------------------------------------------------------ */

extern PyMethodDef core_formula_methods[], core_geometry_methods[], core_model_methods[], core_criteria_methods[],
    core_plan_methods[], core_board_methods[], core_trace_methods[], core_network_methods[], core_touchstone_methods[],
    core_measure_methods[], core_transition_methods[];

#endif
