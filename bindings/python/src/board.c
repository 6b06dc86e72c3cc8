/* Board files, rules, and plans of whole boards. */
#include "core.h"

/* ---- rules --------------------------------------------------------------------------------------- */

static PyObject *rules_end(core_state *state, int32_t status, const lstub_error *err, lstub_rules *rules)
{
    if (core_done(state, status, err, "Rules", 1, 1) < 0) {
        lstub_rules_destroy(rules);
        return NULL;
    }
    return core_handle_new(state, HANDLE_RULES, rules);
}

static PyObject *rules_load(PyObject *module, PyObject *args)
{
    lstub_rules *rules = NULL;
    const char *path;
    int32_t status;
    lstub_error err;
    LSTUB_INIT(err);
    if (!PyArg_ParseTuple(args, "y", &path))
        return NULL;
    Py_BEGIN_ALLOW_THREADS
    status = lstub_rules_load(path, NULL, &rules, &err);
    Py_END_ALLOW_THREADS
    return rules_end(core_of(module), status, &err, rules);
}

static PyObject *rules_parse(PyObject *module, PyObject *args)
{
    lstub_rules *rules = NULL;
    const char *text;
    Py_ssize_t bytes;
    int32_t status;
    lstub_error err;
    LSTUB_INIT(err);
    if (!PyArg_ParseTuple(args, "y#", &text, &bytes))
        return NULL;
    status = lstub_rules_parse(text, (size_t)bytes, NULL, &rules, &err);
    return rules_end(core_of(module), status, &err, rules);
}

static PyObject *signal_item(core_state *state, const void *rules, size_t i)
{
    const char *name = NULL;
    PyObject *text, *link, *wanted;
    lstub_signal signal;
    lstub_criteria criteria;
    lstub_error err;
    LSTUB_INIT(signal);
    LSTUB_INIT(criteria);
    LSTUB_INIT(err);
    if (core_done(state, lstub_rules_signal(rules, (int32_t)i, &name, &signal, &criteria, &err), &err, "Rules", 1, 1) < 0)
        return NULL;
    text = core_text(name ? name : "");
    link = core_unpack(SHAPE_SIGNAL, &signal);
    wanted = core_unpack(SHAPE_CRITERIA, &criteria);
    if (text != NULL && link != NULL && wanted != NULL)
        return Py_BuildValue("(NNN)", text, link, wanted);
    Py_XDECREF(text);
    Py_XDECREF(link);
    Py_XDECREF(wanted);
    return NULL;
}

static PyObject *rules_signals(PyObject *module, PyObject *handle)
{
    core_state *state = core_of(module);
    const lstub_rules *rules = core_handle_get(state, handle, HANDLE_RULES);
    return rules == NULL ? NULL : core_tuple(state, rules, (size_t)lstub_rules_signal_count(rules), signal_item);
}

static PyObject *rules_match(PyObject *module, PyObject *args)
{
    core_state *state = core_of(module);
    const lstub_rules *rules;
    PyObject *handle;
    const char *net;
    int32_t signal = -1;
    lstub_error err;
    LSTUB_INIT(err);
    if (!PyArg_ParseTuple(args, "Os", &handle, &net))
        return NULL;
    rules = core_handle_get(state, handle, HANDLE_RULES);
    if (rules == NULL || core_done(state, lstub_rules_match(rules, net, &signal, &err), &err, "Rules.match", 1, 1) < 0)
        return NULL;
    return PyLong_FromLong(signal);
}

static PyObject *rules_capability(PyObject *module, PyObject *handle)
{
    core_state *state = core_of(module);
    const lstub_rules *rules = core_handle_get(state, handle, HANDLE_RULES);
    lstub_capability capability;
    lstub_error err;
    LSTUB_INIT(capability);
    LSTUB_INIT(err);
    if (rules == NULL ||
        core_done(state, lstub_rules_capability(rules, &capability, &err), &err, "Rules.capability", 1, 1) < 0)
        return NULL;
    return core_unpack(SHAPE_CAPABILITY, &capability);
}

/* ---- board --------------------------------------------------------------------------------------- */

typedef struct progress {
    PyThreadState *thread;      /* the caller's, while the library runs without the GIL */
    PyObject      *call;        /* or null */
    int            raised;
} progress;

/* Also where Ctrl-C is noticed. An exception waits in the thread's state until the call has returned. */
static int32_t on_progress(void *user, double fraction)
{
    progress *p = user;
    PyObject *result = NULL;
    PyEval_RestoreThread(p->thread);
    p->raised = PyErr_CheckSignals() < 0;
    if (!p->raised && p->call != NULL) {
        result = PyObject_CallFunction(p->call, "d", fraction);
        p->raised = result == NULL;
        Py_XDECREF(result);
    }
    p->thread = PyEval_SaveThread();
    return p->raised;
}

static PyObject *board_load(PyObject *module, PyObject *args)
{
    core_state *state = core_of(module);
    PyObject *rules, *call;
    const lstub_rules *with = NULL;
    progress user = {NULL, NULL, 0};
    lstub_board_options options;
    lstub_board *board = NULL;
    const char *path;
    int32_t status;
    lstub_error err;
    LSTUB_INIT(err);
    LSTUB_INIT(options);
    if (!PyArg_ParseTuple(args, "yOzO", &path, &rules, &options.stackup, &call))
        return NULL;
    if (rules != Py_None && (with = core_handle_get(state, rules, HANDLE_RULES)) == NULL)
        return NULL;
    user.call = call == Py_None ? NULL : call;
    options.progress = on_progress;
    options.progress_user = &user;
    user.thread = PyEval_SaveThread();
    status = lstub_board_load(path, with, &options, NULL, &board, &err);
    PyEval_RestoreThread(user.thread);
    if (user.raised || core_done(state, status, &err, "Board.load", 1, 1) < 0) {
        lstub_board_destroy(board);
        return NULL;
    }
    return core_handle_new(state, HANDLE_BOARD, board);
}

static PyObject *board_name(PyObject *module, PyObject *handle)
{
    const lstub_board *board = core_handle_get(core_of(module), handle, HANDLE_BOARD);
    const char *name = board ? lstub_board_name(board) : NULL;
    return board == NULL ? NULL : core_text(name ? name : "");
}

static PyObject *hole_item(core_state *state, const void *board, size_t i)
{
    lstub_hole hole;
    lstub_error err;
    LSTUB_INIT(hole);
    LSTUB_INIT(err);
    if (core_done(state, lstub_board_hole(board, i, &hole, &err), &err, "Board.holes", 1, 1) < 0)
        return NULL;
    return core_unpack(SHAPE_HOLE, &hole);
}

static PyObject *notice_item(core_state *state, const void *board, size_t i)
{
    lstub_notice notice;
    lstub_error err;
    LSTUB_INIT(notice);
    LSTUB_INIT(err);
    if (core_done(state, lstub_board_notice(board, i, &notice, &err), &err, "Board.notices", 1, 1) < 0)
        return NULL;
    return core_unpack(SHAPE_NOTICE, &notice);
}

static PyObject *board_holes(PyObject *module, PyObject *handle)
{
    core_state *state = core_of(module);
    const lstub_board *board = core_handle_get(state, handle, HANDLE_BOARD);
    return board == NULL ? NULL : core_tuple(state, board, lstub_board_hole_count(board), hole_item);
}

static PyObject *board_notices(PyObject *module, PyObject *handle)
{
    core_state *state = core_of(module);
    const lstub_board *board = core_handle_get(state, handle, HANDLE_BOARD);
    return board == NULL ? NULL : core_tuple(state, board, lstub_board_notice_count(board), notice_item);
}

static PyObject *board_hole_count(PyObject *module, PyObject *handle)
{
    const lstub_board *board = core_handle_get(core_of(module), handle, HANDLE_BOARD);
    return board == NULL ? NULL : PyLong_FromSize_t(lstub_board_hole_count(board));
}

static PyObject *board_via(PyObject *module, PyObject *args)
{
    core_state *state = core_of(module);
    const lstub_board *board;
    PyObject *handle;
    Py_ssize_t index;
    lstub_via via;
    lstub_error err;
    LSTUB_INIT(via);
    LSTUB_INIT(err);
    if (!PyArg_ParseTuple(args, "On", &handle, &index))
        return NULL;
    board = core_handle_get(state, handle, HANDLE_BOARD);
    if (board == NULL ||
        core_done(state, lstub_board_via(board, (size_t)index, &via, &err), &err, "Board.via", 1, 1) < 0)
        return NULL;
    return core_unpack(SHAPE_VIA, &via);
}

/* ---- plan of a board ----------------------------------------------------------------------------- */

static PyObject *board_plan(PyObject *module, PyObject *args)
{
    core_state *state = core_of(module);
    PyObject *handle, *rules, *capability, *options;
    const void *board, *with, *shop, *choice;
    lstub_plan *plan = NULL;
    int32_t status;
    lstub_error err;
    LSTUB_INIT(err);
    if (!PyArg_ParseTuple(args, "OOOO", &handle, &rules, &capability, &options))
        return NULL;
    board = core_handle_get(state, handle, HANDLE_BOARD);
    with = board ? core_handle_get(state, rules, HANDLE_RULES) : NULL;
    choice = with ? core_record_get(state, options, SHAPE_OPTIONS, "options") : NULL;
    if (choice == NULL)
        return NULL;
    if (core_record_optional(state, capability, SHAPE_CAPABILITY, "capability", &shop) < 0)
        return NULL;
    Py_BEGIN_ALLOW_THREADS
    status = lstub_board_plan(board, with, shop, choice, NULL, &plan, &err);
    Py_END_ALLOW_THREADS
    if (core_done(state, status, &err, "Board.plan", 1, 1) < 0) {
        lstub_plan_destroy(plan);
        return NULL;
    }
    return core_handle_new(state, HANDLE_PLAN, plan);
}

typedef int32_t (*board_writer)(const lstub_board *, const lstub_plan *, const char *, lstub_error *);

static PyObject *write_with(PyObject *module, PyObject *args, board_writer writer, const char *what)
{
    core_state *state = core_of(module);
    PyObject *board, *plan;
    const void *from, *with;
    const char *path;
    int32_t status;
    lstub_error err;
    LSTUB_INIT(err);
    if (!PyArg_ParseTuple(args, "OOy", &board, &plan, &path))
        return NULL;
    from = core_handle_get(state, board, HANDLE_BOARD);
    with = from ? core_handle_get(state, plan, HANDLE_PLAN) : NULL;
    if (with == NULL)
        return NULL;
    Py_BEGIN_ALLOW_THREADS
    status = writer(from, with, path, &err);
    Py_END_ALLOW_THREADS
    if (core_done(state, status, &err, what, 1, 1) < 0)
        return NULL;
    Py_RETURN_NONE;
}

static PyObject *board_write(PyObject *module, PyObject *args)
{
    return write_with(module, args, lstub_board_write, "Board.write");
}

static PyObject *board_write_plan_csv(PyObject *module, PyObject *args)
{
    return write_with(module, args, lstub_board_write_plan_csv, "Board.write_plan_csv");
}

static PyObject *board_write_drill_csv(PyObject *module, PyObject *args)
{
    return write_with(module, args, lstub_board_write_drill_csv, "Board.write_drill_csv");
}

static PyObject *board_summary(PyObject *module, PyObject *args)
{
    core_state *state = core_of(module);
    PyObject *board, *plan, *text = NULL;
    const void *from, *with;
    size_t needed = 0;
    char *buffer;
    lstub_error err;
    LSTUB_INIT(err);
    if (!PyArg_ParseTuple(args, "OO", &board, &plan))
        return NULL;
    from = core_handle_get(state, board, HANDLE_BOARD);
    with = from ? core_handle_get(state, plan, HANDLE_PLAN) : NULL;
    if (with == NULL || core_done(state, lstub_board_summary(from, with, NULL, 0, &needed, &err), &err,
                                  "Board.summary", 1, 1) < 0)
        return NULL;
    buffer = PyMem_Calloc(needed + 1, 1);
    if (buffer == NULL)
        return PyErr_NoMemory();
    if (core_done(state, lstub_board_summary(from, with, buffer, needed, &needed, &err), &err, "Board.summary", 1, 1) == 0)
        text = core_text(buffer);
    PyMem_Free(buffer);
    return text;
}

PyMethodDef core_board_methods[] = {
    {"rules_load", rules_load, METH_VARARGS, NULL},
    {"rules_parse", rules_parse, METH_VARARGS, NULL},
    {"rules_signals", rules_signals, METH_O, NULL},
    {"rules_match", rules_match, METH_VARARGS, NULL},
    {"rules_capability", rules_capability, METH_O, NULL},
    {"board_load", board_load, METH_VARARGS, NULL},
    {"board_name", board_name, METH_O, NULL},
    {"board_hole_count", board_hole_count, METH_O, NULL},
    {"board_holes", board_holes, METH_O, NULL},
    {"board_notices", board_notices, METH_O, NULL},
    {"board_via", board_via, METH_VARARGS, NULL},
    {"board_plan", board_plan, METH_VARARGS, NULL},
    {"board_write", board_write, METH_VARARGS, NULL},
    {"board_write_plan_csv", board_write_plan_csv, METH_VARARGS, NULL},
    {"board_write_drill_csv", board_write_drill_csv, METH_VARARGS, NULL},
    {"board_summary", board_summary, METH_VARARGS, NULL},
    {NULL, NULL, 0, NULL},
};
