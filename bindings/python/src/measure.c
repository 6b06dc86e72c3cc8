/* From the lab to the model: notches of measured curves, and what is fitted to them. */
#include "core.h"

static PyObject *notch_item(core_state *state, const void *notches, size_t i)
{
    (void)state;
    return core_unpack(SHAPE_MEASURED, (const lstub_measured_notch *)notches + i);
}

/* find_notches(freq, s, search, averaged_db, trend_db) */
static PyObject *find_notches(PyObject *module, PyObject *args)
{
    core_state *state = core_of(module);
    PyObject *f, *s, *search, *to[2], *tuple = NULL;
    core_buffer freq = {0}, data = {0}, curve[2] = {{0}, {0}};
    static const char *const names[] = {"averaged_db", "trend_db"};
    lstub_measured_notch *notches = NULL;
    const void *choice;
    size_t capacity = 16, count = 0, i;
    int32_t status;
    lstub_error err;
    LSTUB_INIT(err);
    if (!PyArg_ParseTuple(args, "OOOOO", &f, &s, &search, &to[0], &to[1]))
        return NULL;
    choice = core_record_get(state, search, SHAPE_SEARCH, "search");
    if (choice == NULL || core_buffer_read(f, "freq", &freq) < 0 || core_buffer_complex(s, "s", &data) < 0)
        goto end;
    if (data.count != freq.count) {
        core_bad_argument(state, "s", "s: %zd values: must be as many as frequencies (%zd)", (Py_ssize_t)data.count, (Py_ssize_t)freq.count);
        goto end;
    }
    for (i = 0; i < 2; i++)
        if (core_buffer_write(to[i], names[i], 'd', freq.count, &curve[i]) < 0)
            goto end;
    do {
        capacity = count > capacity ? count : capacity;
        PyMem_Free(notches);
        notches = PyMem_Calloc(capacity, sizeof *notches);
        if (notches == NULL) {
            PyErr_NoMemory();
            goto end;
        }
        for (i = 0; i < capacity; i++)
            LSTUB_INIT(notches[i]);
        Py_BEGIN_ALLOW_THREADS
        status = lstub_find_notches(freq.data, freq.count, data.data, 16, choice, notches, capacity, sizeof notches[0], &count,
                                    curve[0].data, curve[1].data, &err);
        Py_END_ALLOW_THREADS
    } while (status == LSTUB_W_CAPACITY && count > capacity);
    if (core_done(state, status, &err, "find_notches", 1, 1) == 0)
        tuple = core_tuple(state, notches, count < capacity ? count : capacity, notch_item);
end:
    PyMem_Free(notches);
    core_buffer_free(&freq);
    core_buffer_free(&data);
    core_buffer_free(&curve[0]);
    core_buffer_free(&curve[1]);
    return tuple;
}

/* ---- fits ---------------------------------------------------------------------------------------- */

typedef struct coupons {
    core_buffer f, sigma, residuals;
} coupons;

static int take_coupons(core_state *state, coupons *c, PyObject *f, PyObject *sigma, PyObject *residuals)
{
    if (core_buffer_read(f, "f", &c->f) < 0 || core_buffer_read(sigma, "f_sigma", &c->sigma) < 0)
        return -1;
    if (c->sigma.count != c->f.count)
        return core_bad_argument(state, "f_sigma", "f_sigma: %zd values: must be one, or as many as f (%zd)", (Py_ssize_t)c->sigma.count,
                                 (Py_ssize_t)c->f.count);
    return core_buffer_write(residuals, "residuals", 'd', c->f.count, &c->residuals);
}

static void free_coupons(coupons *c)
{
    core_buffer_free(&c->f);
    core_buffer_free(&c->sigma);
    core_buffer_free(&c->residuals);
}

typedef struct prediction {
    core_state *state;
    PyObject   *call;
} prediction;

/* The model is Python's, so the GIL is kept. An exception ends the fit. */
static int32_t predict_one(void *user, double ratio, double offset, size_t coupon, double *f)
{
    prediction *p = user;
    PyObject *value = PyObject_CallFunction(p->call, "ddn", ratio, offset, (Py_ssize_t)coupon);
    int done = value == NULL ? -1 : core_number(p->state, value, "predict", f);
    Py_XDECREF(value);
    return done < 0 ? LSTUB_E_ARGUMENT : LSTUB_OK;
}

/* fit_in_plane_dk(predict, f, f_sigma, with_offset, residuals) -> tuple */
static PyObject *fit_in_plane_dk(PyObject *module, PyObject *args)
{
    core_state *state = core_of(module);
    PyObject *f, *sigma, *residuals;
    prediction user = {state, NULL};
    coupons c = {{0}, {0}, {0}};
    lstub_fit fit;
    int32_t status;
    lstub_error err;
    int with_offset, done = -1;
    LSTUB_INIT(fit);
    LSTUB_INIT(err);
    if (!PyArg_ParseTuple(args, "OOOpO", &user.call, &f, &sigma, &with_offset, &residuals))
        return NULL;
    if (take_coupons(state, &c, f, sigma, residuals) == 0) {
        status = lstub_fit_in_plane_dk(predict_one, &user, c.f.data, c.sigma.data, c.f.count, with_offset, &fit, c.residuals.data, &err);
        done = PyErr_Occurred() ? -1 : core_done(state, status, &err, "fit_in_plane_dk", 1, 1);
    }
    free_coupons(&c);
    return done < 0 ? NULL : core_unpack(SHAPE_FIT, &fit);
}

/* fit_coupons(stackup, vias, options, f, f_sigma, with_offset, residuals) -> (tuple, stackup) */
static PyObject *fit_coupons(PyObject *module, PyObject *args)
{
    core_state *state = core_of(module);
    PyObject *handle, *vias, *options, *f, *sigma, *residuals, *values, *board;
    const lstub_stackup *stackup;
    const void *choice;
    lstub_stackup *fitted = NULL;
    core_gather gather = {0};
    coupons c = {{0}, {0}, {0}};
    lstub_fit fit;
    int32_t status;
    lstub_error err;
    int with_offset, done = -1;
    LSTUB_INIT(fit);
    LSTUB_INIT(err);
    if (!PyArg_ParseTuple(args, "OOOOOpO", &handle, &vias, &options, &f, &sigma, &with_offset, &residuals))
        return NULL;
    stackup = core_handle_get(state, handle, HANDLE_STACKUP);
    choice = stackup ? core_record_get(state, options, SHAPE_OPTIONS, "options") : NULL;
    if (choice == NULL)
        return NULL;
    if (core_gather_take(state, vias, SHAPE_VIA, "vias", &gather) == 0 && take_coupons(state, &c, f, sigma, residuals) == 0) {
        if (gather.count != c.f.count)
            core_bad_argument(state, "f", "f: %zd values: must be as many as vias (%zd)", (Py_ssize_t)c.f.count, (Py_ssize_t)gather.count);
        else {
            Py_BEGIN_ALLOW_THREADS
            status = lstub_fit_coupons(stackup, gather.items, gather.count, sizeof(lstub_via), c.f.data, c.sigma.data, with_offset,
                                       choice, NULL, &fitted, &fit, c.residuals.data, &err);
            Py_END_ALLOW_THREADS
            done = core_done(state, status, &err, "fit_coupons", 1, 1);
        }
    }
    core_gather_free(&gather);
    free_coupons(&c);
    if (done < 0) {
        lstub_stackup_destroy(fitted);
        return NULL;
    }
    board = core_handle_new(state, HANDLE_STACKUP, fitted);
    values = core_unpack(SHAPE_FIT, &fit);
    if (board != NULL && values != NULL)
        return Py_BuildValue("(NN)", values, board);
    Py_XDECREF(board);
    Py_XDECREF(values);
    return NULL;
}

static PyObject *with_in_plane_ratio(PyObject *module, PyObject *args)
{
    core_state *state = core_of(module);
    const lstub_stackup *stackup;
    lstub_stackup *other = NULL;
    PyObject *handle, *value;
    double ratio;
    lstub_error err;
    LSTUB_INIT(err);
    if (!PyArg_ParseTuple(args, "OO", &handle, &value))
        return NULL;
    stackup = core_handle_get(state, handle, HANDLE_STACKUP);
    if (stackup == NULL || core_number(state, value, "ratio", &ratio) < 0 ||
        core_done(state, lstub_stackup_with_in_plane_ratio(stackup, ratio, NULL, &other, &err), &err, "Stackup.with_in_plane_ratio", 1, 1) < 0)
        return NULL;
    return core_handle_new(state, HANDLE_STACKUP, other);
}

PyMethodDef core_measure_methods[] = {
    {"find_notches", find_notches, METH_VARARGS, NULL},
    {"fit_in_plane_dk", fit_in_plane_dk, METH_VARARGS, NULL},
    {"fit_coupons", fit_coupons, METH_VARARGS, NULL},
    {"with_in_plane_ratio", with_in_plane_ratio, METH_VARARGS, NULL},
    {NULL, NULL, 0, NULL},
};
