/* Plans: made from jobs, read item by item. */
#include "core.h"

static PyObject *plan_create(PyObject *module, PyObject *args)
{
    core_state *state = core_of(module);
    PyObject *handle, *jobs, *capability, *options;
    const void *stackup, *shop, *choice;
    core_gather gather = {0};
    lstub_plan *plan = NULL;
    int32_t status = LSTUB_OK;
    lstub_error err;
    int done = -1;
    LSTUB_INIT(err);
    if (!PyArg_ParseTuple(args, "OOOO", &handle, &jobs, &capability, &options))
        return NULL;
    stackup = core_handle_get(state, handle, HANDLE_STACKUP);
    shop = stackup ? core_record_get(state, capability, SHAPE_CAPABILITY, "capability") : NULL;
    choice = shop ? core_record_get(state, options, SHAPE_OPTIONS, "options") : NULL;
    if (choice == NULL)
        return NULL;
    if (core_gather_take(state, jobs, SHAPE_JOB, "jobs", &gather) == 0) {
        Py_BEGIN_ALLOW_THREADS
        status = lstub_plan_create(stackup, gather.items, gather.count, sizeof(lstub_job), shop, choice, NULL, &plan, &err);
        Py_END_ALLOW_THREADS
        done = core_done(state, status, &err, "plan", 1, 1);
    }
    core_gather_free(&gather);
    if (done < 0) {
        lstub_plan_destroy(plan);
        return NULL;
    }
    return core_handle_new(state, HANDLE_PLAN, plan);
}

static PyObject *plan_count(PyObject *module, PyObject *handle)
{
    const lstub_plan *plan = core_handle_get(core_of(module), handle, HANDLE_PLAN);
    return plan == NULL ? NULL : PyLong_FromSize_t(lstub_plan_count(plan));
}

static const lstub_plan *plan_and_index(core_state *state, PyObject *args, Py_ssize_t *index)
{
    PyObject *handle;
    if (!PyArg_ParseTuple(args, "On", &handle, index))
        return NULL;
    return core_handle_get(state, handle, HANDLE_PLAN);
}

static PyObject *plan_decision(PyObject *module, PyObject *args)
{
    core_state *state = core_of(module);
    Py_ssize_t index;
    const lstub_plan *plan = plan_and_index(state, args, &index);
    lstub_decision decision;
    lstub_error err;
    LSTUB_INIT(decision);
    LSTUB_INIT(err);
    if (plan == NULL ||
        core_done(state, lstub_plan_decision(plan, (size_t)index, &decision, &err), &err, "Plan", 1, 1) < 0)
        return NULL;
    return core_unpack(SHAPE_DECISION, &decision);
}

static PyObject *plan_reason(PyObject *module, PyObject *args)
{
    core_state *state = core_of(module);
    Py_ssize_t index;
    const lstub_plan *plan = plan_and_index(state, args, &index);
    char text[LSTUB_REASON_MAX] = "";
    lstub_error err;
    LSTUB_INIT(err);
    if (plan == NULL ||
        core_done(state, lstub_plan_reason(plan, (size_t)index, text, sizeof text, &err), &err, "Plan.reason", 1, 1) < 0)
        return NULL;
    return core_text(text);
}

static PyObject *group_item(core_state *state, const void *plan, size_t i)
{
    lstub_drill_group group;
    lstub_error err;
    LSTUB_INIT(group);
    LSTUB_INIT(err);
    if (core_done(state, lstub_plan_group(plan, (int32_t)i, &group, &err), &err, "Plan.groups", 1, 1) < 0)
        return NULL;
    return core_unpack(SHAPE_GROUP, &group);
}

static PyObject *plan_groups(PyObject *module, PyObject *handle)
{
    core_state *state = core_of(module);
    const lstub_plan *plan = core_handle_get(state, handle, HANDLE_PLAN);
    return plan == NULL ? NULL : core_tuple(state, plan, (size_t)lstub_plan_group_count(plan), group_item);
}

static PyObject *plan_totals(PyObject *module, PyObject *handle)
{
    core_state *state = core_of(module);
    const lstub_plan *plan = core_handle_get(state, handle, HANDLE_PLAN);
    lstub_plan_summary summary;
    lstub_error err;
    LSTUB_INIT(summary);
    LSTUB_INIT(err);
    if (plan == NULL || core_done(state, lstub_plan_totals(plan, &summary, &err), &err, "Plan.totals", 1, 1) < 0)
        return NULL;
    return core_unpack(SHAPE_SUMMARY, &summary);
}

PyMethodDef core_plan_methods[] = {
    {"plan_create", plan_create, METH_VARARGS, NULL},
    {"plan_count", plan_count, METH_O, NULL},
    {"plan_decision", plan_decision, METH_VARARGS, NULL},
    {"plan_reason", plan_reason, METH_VARARGS, NULL},
    {"plan_groups", plan_groups, METH_O, NULL},
    {"plan_totals", plan_totals, METH_O, NULL},
    {NULL, NULL, 0, NULL},
};
