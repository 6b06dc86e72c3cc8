/* Sums on networks: arrays in, arrays out, item by item; and their responses over time. */
#include "core.h"

#define UNTOUCHED INT32_MIN       /* of a status: the call ended before it came to the items */

typedef struct network {          /* arrays of one call: two networks at most, one or two results */
    core_buffer in[3], out[2];
    size_t      n;
    int32_t     p;
    int32_t    *status;
} network;

static void network_free(network *net)
{
    int i;
    for (i = 0; i < 3; i++)
        core_buffer_free(&net->in[i]);
    core_buffer_free(&net->out[0]);
    core_buffer_free(&net->out[1]);
    PyMem_Free(net->status);
}

static int bad_count(core_state *state, const char *name, size_t found, size_t wanted)
{
    return core_bad_argument(state, name, "%s: %zd values: must be %zd", name, (Py_ssize_t)found, (Py_ssize_t)wanted);
}

/* The first array says how many points there are; `per_point` values each. */
static int network_take(core_state *state, network *net, PyObject *array, const char *name, size_t per_point)
{
    if (core_buffer_complex(array, name, &net->in[0]) < 0)
        return -1;
    if (per_point == 0 || net->in[0].count % per_point != 0)
        return bad_count(state, name, net->in[0].count, per_point);
    net->n = net->in[0].count / per_point;
    net->status = PyMem_Calloc(net->n + 1, sizeof *net->status);
    if (net->status == NULL) {
        PyErr_NoMemory();
        return -1;
    }
    for (size_t i = 0; i < net->n; i++)
        net->status[i] = UNTOUCHED;
    return 0;
}

static int network_square(core_state *state, network *net, PyObject *array, const char *name, PyObject *ports)
{
    if (core_int(state, ports, "ports", &net->p) < 0)
        return -1;
    if (net->p < 1 || net->p > LSTUB_PORTS_MAX)
        return core_bad_argument(state, "ports", "%s: %d ports: must be >= 1 and <= %d", name, (int)net->p, LSTUB_PORTS_MAX);
    return network_take(state, net, array, name, (size_t)net->p * (size_t)net->p);
}

static int network_same(core_state *state, network *net, int place, PyObject *array, const char *name)
{
    if (core_buffer_complex(array, name, &net->in[place]) < 0)
        return -1;
    return net->in[place].count == net->in[0].count ? 0 : bad_count(state, name, net->in[place].count, net->in[0].count);
}

static int network_reals(core_state *state, core_buffer *buffer, PyObject *array, const char *name, size_t count)
{
    if (core_buffer_read(array, name, buffer) < 0)
        return -1;
    return buffer->count == count ? 0 : bad_count(state, name, buffer->count, count);
}

static int network_to(network *net, int place, PyObject *array, char type, size_t count)
{
    return core_buffer_write(array, "out", type, count, &net->out[place]);
}

/* Items that fail are NaN by now: an exception for the first, or, where they are to be marked only, nothing. */
static PyObject *network_done(core_state *state, network *net, int32_t status, const lstub_error *err, const char *what, int mark)
{
    Py_ssize_t near = 0;
    int all = 1, done;
    for (size_t i = 0; i < net->n; i++) {
        near += net->status[i] == LSTUB_W_RANGE;
        all &= net->status[i] != UNTOUCHED;
    }
    if (status < 0 && mark && all && net->n > 0)
        status = near > 0 ? LSTUB_W_RANGE : LSTUB_OK;
    done = core_done(state, status, err, what, net->n > 0 ? near : 1, net->n > 0 ? (Py_ssize_t)net->n : 1);
    network_free(net);
    if (done < 0)
        return NULL;
    Py_RETURN_NONE;
}

static PyObject *network_fail(network *net)
{
    network_free(net);
    return NULL;
}

#define CALL(...) \
    Py_BEGIN_ALLOW_THREADS \
    status = __VA_ARGS__; \
    Py_END_ALLOW_THREADS

/* ---- matrices ------------------------------------------------------------------------------------ */

/* renormalise(s, ports, z_from, z_to, out, mark): z of a value for each port, real; or for each port of each point, complex */
static PyObject *renormalise(PyObject *module, PyObject *args)
{
    core_state *state = core_of(module);
    PyObject *s, *ports, *from, *to, *out;
    network net = {0};
    core_buffer z[2] = {{0}, {0}};
    int32_t status = LSTUB_OK;
    lstub_error err;
    int mark, is_complex, taken;
    LSTUB_INIT(err);
    if (!PyArg_ParseTuple(args, "OOOOOpp", &s, &ports, &from, &to, &out, &is_complex, &mark))
        return NULL;
    if (network_square(state, &net, s, "s", ports) < 0 || network_to(&net, 0, out, 'Z', net.in[0].count) < 0)
        return network_fail(&net);
    if (is_complex) {
        size_t count = net.n * (size_t)net.p;
        taken = core_buffer_complex(from, "z_from", &z[0]) == 0 && core_buffer_complex(to, "z_to", &z[1]) == 0 &&
                (z[0].count == count || bad_count(state, "z_from", z[0].count, count) == 0) &&
                (z[1].count == count || bad_count(state, "z_to", z[1].count, count) == 0);
        if (taken)
            CALL(lstub_network_renormalise_complex(net.in[0].data, net.n, net.p, z[0].data, z[1].data, net.out[0].data, net.status, &err))
    } else {
        taken = network_reals(state, &z[0], from, "z_from", (size_t)net.p) == 0 &&
                network_reals(state, &z[1], to, "z_to", (size_t)net.p) == 0;
        if (taken)
            CALL(lstub_network_renormalise(net.in[0].data, net.n, net.p, z[0].data, z[1].data, net.out[0].data, net.status, &err))
    }
    core_buffer_free(&z[0]);
    core_buffer_free(&z[1]);
    return taken ? network_done(state, &net, status, &err, "renormalise", mark) : network_fail(&net);
}

/* convert(matrix, ports, from, to, z, out, mark) */
static PyObject *convert(PyObject *module, PyObject *args)
{
    core_state *state = core_of(module);
    PyObject *in, *ports, *z, *out;
    network net = {0};
    core_buffer reference = {0};
    int32_t status;
    lstub_error err;
    int from, to, mark;
    LSTUB_INIT(err);
    if (!PyArg_ParseTuple(args, "OOiiOOp", &in, &ports, &from, &to, &z, &out, &mark))
        return NULL;
    if (network_square(state, &net, in, "matrix", ports) < 0 || network_to(&net, 0, out, 'Z', net.in[0].count) < 0 ||
        network_reals(state, &reference, z, "z", (size_t)net.p) < 0) {
        core_buffer_free(&reference);
        return network_fail(&net);
    }
    CALL(lstub_network_convert(net.in[0].data, net.n, net.p, from, to, reference.data, net.out[0].data, net.status, &err))
    core_buffer_free(&reference);
    return network_done(state, &net, status, &err, "convert", mark);
}

/* cascade(a, ports, b, out, mark) */
static PyObject *cascade(PyObject *module, PyObject *args)
{
    core_state *state = core_of(module);
    PyObject *a, *ports, *b, *out;
    network net = {0};
    int32_t status;
    lstub_error err;
    int mark;
    LSTUB_INIT(err);
    if (!PyArg_ParseTuple(args, "OOOOp", &a, &ports, &b, &out, &mark))
        return NULL;
    if (network_square(state, &net, a, "a", ports) < 0 || network_same(state, &net, 1, b, "b") < 0 ||
        network_to(&net, 0, out, 'Z', net.in[0].count) < 0)
        return network_fail(&net);
    CALL(lstub_network_cascade(net.in[0].data, net.in[1].data, net.n, net.p, net.out[0].data, net.status, &err))
    return network_done(state, &net, status, &err, "cascade", mark);
}

/* deembed(measured, ports, left or None, right or None, out, mark) */
static PyObject *deembed(PyObject *module, PyObject *args)
{
    core_state *state = core_of(module);
    PyObject *s, *ports, *left, *right, *out;
    network net = {0};
    int32_t status;
    lstub_error err;
    int mark;
    LSTUB_INIT(err);
    if (!PyArg_ParseTuple(args, "OOOOOp", &s, &ports, &left, &right, &out, &mark))
        return NULL;
    if (network_square(state, &net, s, "measured", ports) < 0 ||
        (left != Py_None && network_same(state, &net, 1, left, "left") < 0) ||
        (right != Py_None && network_same(state, &net, 2, right, "right") < 0) ||
        network_to(&net, 0, out, 'Z', net.in[0].count) < 0)
        return network_fail(&net);
    CALL(lstub_network_deembed(net.in[0].data, net.in[1].data, net.in[2].data, net.n, net.p, net.out[0].data, net.status, &err))
    return network_done(state, &net, status, &err, "deembed", mark);
}

/* shunt(zin, z_ref, out, mark) */
static PyObject *shunt(PyObject *module, PyObject *args)
{
    core_state *state = core_of(module);
    PyObject *zin, *z, *out;
    network net = {0};
    int32_t status;
    double z_ref;
    lstub_error err;
    int mark;
    LSTUB_INIT(err);
    if (!PyArg_ParseTuple(args, "OOOp", &zin, &z, &out, &mark))
        return NULL;
    if (core_number(state, z, "z_ref", &z_ref) < 0 || network_take(state, &net, zin, "zin", 1) < 0 ||
        network_to(&net, 0, out, 'Z', 4 * net.n) < 0)
        return network_fail(&net);
    CALL(lstub_network_shunt(net.in[0].data, net.n, z_ref, net.out[0].data, net.status, &err))
    return network_done(state, &net, status, &err, "shunt", mark);
}

static int take_pairs(core_state *state, PyObject *pairs, int32_t *to, int32_t *count)
{
    Py_ssize_t found = PyTuple_Check(pairs) ? PyTuple_Size(pairs) : -1, i;
    if (found < 0 || found % 2 != 0 || found > LSTUB_PORTS_MAX)
        return core_bad_argument(state, "pairs", "pairs: must be at most %d pairs of ports", LSTUB_PORTS_MAX / 2);
    for (i = 0; i < found; i++)
        if (core_int(state, PyTuple_GetItem(pairs, i), "pairs", &to[i]) < 0)
            return -1;
    *count = (int32_t)(found / 2);
    return 0;
}

/* to_mixed(s, ports, pairs, z, out, z_mixed, mark) */
static PyObject *to_mixed(PyObject *module, PyObject *args)
{
    core_state *state = core_of(module);
    PyObject *s, *ports, *pairs, *z, *out, *modes;
    network net = {0};
    core_buffer reference = {0};
    int32_t status, port[LSTUB_PORTS_MAX], count;
    lstub_error err;
    int mark, taken;
    LSTUB_INIT(err);
    if (!PyArg_ParseTuple(args, "OOOOOOp", &s, &ports, &pairs, &z, &out, &modes, &mark))
        return NULL;
    taken = network_square(state, &net, s, "s", ports) == 0 && take_pairs(state, pairs, port, &count) == 0 &&
            network_reals(state, &reference, z, "z", (size_t)net.p) == 0 && network_to(&net, 0, out, 'Z', net.in[0].count) == 0 &&
            network_to(&net, 1, modes, 'd', (size_t)net.p) == 0;
    if (taken)
        CALL(lstub_network_to_mixed(net.in[0].data, net.n, net.p, port, count, reference.data, net.out[0].data, net.out[1].data,
                                    net.status, &err))
    core_buffer_free(&reference);
    return taken ? network_done(state, &net, status, &err, "to_mixed", mark) : network_fail(&net);
}

/* to_single(s, ports, pairs, z, out, mark) */
static PyObject *to_single(PyObject *module, PyObject *args)
{
    core_state *state = core_of(module);
    PyObject *s, *ports, *pairs, *z, *out;
    network net = {0};
    core_buffer reference = {0};
    int32_t status, port[LSTUB_PORTS_MAX], count;
    lstub_error err;
    int mark, taken;
    LSTUB_INIT(err);
    if (!PyArg_ParseTuple(args, "OOOOOp", &s, &ports, &pairs, &z, &out, &mark))
        return NULL;
    taken = network_square(state, &net, s, "s", ports) == 0 && take_pairs(state, pairs, port, &count) == 0 &&
            network_reals(state, &reference, z, "z", (size_t)net.p) == 0 && network_to(&net, 0, out, 'Z', net.in[0].count) == 0;
    if (taken)
        CALL(lstub_network_to_single(net.in[0].data, net.n, net.p, port, count, reference.data, net.out[0].data, net.status, &err))
    core_buffer_free(&reference);
    return taken ? network_done(state, &net, status, &err, "to_single", mark) : network_fail(&net);
}

typedef int32_t (*network_check)(const double *, size_t, int32_t, double *, int32_t *, lstub_error *);

static PyObject *check(PyObject *module, PyObject *args, network_check call, const char *what)
{
    core_state *state = core_of(module);
    PyObject *s, *ports, *out;
    network net = {0};
    int32_t status;
    lstub_error err;
    int mark;
    LSTUB_INIT(err);
    if (!PyArg_ParseTuple(args, "OOOp", &s, &ports, &out, &mark))
        return NULL;
    if (network_square(state, &net, s, "s", ports) < 0 || network_to(&net, 0, out, 'd', net.n) < 0)
        return network_fail(&net);
    CALL(call(net.in[0].data, net.n, net.p, net.out[0].data, net.status, &err))
    return network_done(state, &net, status, &err, what, mark);
}

static PyObject *passivity(PyObject *module, PyObject *args) { return check(module, args, lstub_network_passivity, "passivity"); }
static PyObject *reciprocity(PyObject *module, PyObject *args) { return check(module, args, lstub_network_reciprocity, "reciprocity"); }

/* port_map(s, ports, map, out) */
static PyObject *port_map(PyObject *module, PyObject *args)
{
    core_state *state = core_of(module);
    PyObject *s, *ports, *map, *out;
    network net = {0};
    int32_t status, place[LSTUB_PORTS_MAX];
    Py_ssize_t count, i;
    lstub_error err;
    LSTUB_INIT(err);
    if (!PyArg_ParseTuple(args, "OOO!O", &s, &ports, &PyTuple_Type, &map, &out))
        return NULL;
    count = PyTuple_Size(map);
    if (count > LSTUB_PORTS_MAX) {
        core_bad_argument(state, "map", "map: %zd ports: must be >= 1 and <= %d", count, LSTUB_PORTS_MAX);
        return NULL;
    }
    for (i = 0; i < count; i++)
        if (core_int(state, PyTuple_GetItem(map, i), "map", &place[i]) < 0)
            return NULL;
    if (network_square(state, &net, s, "s", ports) < 0 || network_to(&net, 0, out, 'Z', net.n * (size_t)(count * count)) < 0)
        return network_fail(&net);
    CALL(lstub_port_map(net.in[0].data, net.n, net.p, place, (int32_t)count, net.out[0].data, &err))
    return network_done(state, &net, status, &err, "port_map", 0);
}

/* ---- over time ----------------------------------------------------------------------------------- */

static int network_over_time(core_state *state, network *net, PyObject *f, PyObject *s, PyObject *ports)
{
    if (network_square(state, net, s, "s", ports) < 0)
        return -1;
    return network_reals(state, &net->in[1], f, "freq", net->n);
}

/* causality(freq, s, ports, t0, early) -> resolution */
static PyObject *causality(PyObject *module, PyObject *args)
{
    core_state *state = core_of(module);
    PyObject *f, *s, *ports, *start, *out, *none;
    network net = {0};
    double t0, resolution = 0.0;
    int32_t status;
    lstub_error err;
    LSTUB_INIT(err);
    if (!PyArg_ParseTuple(args, "OOOOO", &f, &s, &ports, &start, &out))
        return NULL;
    if (core_number(state, start, "t0", &t0) < 0 || network_over_time(state, &net, f, s, ports) < 0 ||
        network_to(&net, 0, out, 'd', (size_t)net.p * (size_t)net.p) < 0)
        return network_fail(&net);
    CALL(lstub_network_causality(net.in[1].data, net.in[0].data, net.n, net.p, t0, net.out[0].data, &resolution, &err))
    net.n = 0;                    /* the call has one result, not one for each point */
    none = network_done(state, &net, status, &err, "causality", 0);
    Py_XDECREF(none);
    return none == NULL ? NULL : PyFloat_FromDouble(resolution);
}

/* step_response(freq, s, ports, to, from, rise_time, t, out) */
static PyObject *step_response(PyObject *module, PyObject *args)
{
    core_state *state = core_of(module);
    PyObject *f, *s, *ports, *seen, *driven, *edge, *t, *out;
    network net = {0};
    double rise_time;
    int32_t status, to, from;
    lstub_error err;
    LSTUB_INIT(err);
    if (!PyArg_ParseTuple(args, "OOOOOOOO", &f, &s, &ports, &seen, &driven, &edge, &t, &out))
        return NULL;
    if (core_int(state, seen, "to", &to) < 0 || core_int(state, driven, "from_", &from) < 0 ||
        core_number(state, edge, "rise_time", &rise_time) < 0 || network_over_time(state, &net, f, s, ports) < 0 ||
        core_buffer_read(t, "t", &net.in[2]) < 0 || network_to(&net, 0, out, 'd', net.in[2].count) < 0)
        return network_fail(&net);
    CALL(lstub_step_response(net.in[1].data, net.in[0].data, net.n, net.p, to, from, rise_time, net.in[2].data, net.in[2].count,
                             net.out[0].data, &err))
    net.n = 0;
    return network_done(state, &net, status, &err, "step_response", 0);
}

/* tdr(freq, s, ports, port, z_ref, rise_time, t, out) */
static PyObject *tdr(PyObject *module, PyObject *args)
{
    core_state *state = core_of(module);
    PyObject *f, *s, *ports, *seen, *z, *edge, *t, *out;
    network net = {0};
    double z_ref, rise_time;
    int32_t status, port;
    lstub_error err;
    LSTUB_INIT(err);
    if (!PyArg_ParseTuple(args, "OOOOOOOO", &f, &s, &ports, &seen, &z, &edge, &t, &out))
        return NULL;
    if (core_int(state, seen, "port", &port) < 0 || core_number(state, z, "z_ref", &z_ref) < 0 ||
        core_number(state, edge, "rise_time", &rise_time) < 0 || network_over_time(state, &net, f, s, ports) < 0 ||
        core_buffer_read(t, "t", &net.in[2]) < 0 || network_to(&net, 0, out, 'd', net.in[2].count) < 0)
        return network_fail(&net);
    CALL(lstub_tdr(net.in[1].data, net.in[0].data, net.n, net.p, port, z_ref, rise_time, net.in[2].data, net.in[2].count,
                   net.out[0].data, &err))
    net.n = 0;
    return network_done(state, &net, status, &err, "tdr", 0);
}

/* insertion_loss_deviation(freq, loss, fit, deviation) -> tuple */
static PyObject *insertion_loss_deviation(PyObject *module, PyObject *args)
{
    core_state *state = core_of(module);
    PyObject *f, *loss, *fit, *out, *none;
    network net = {0};
    const void *choice;
    lstub_loss_deviation found;
    int32_t status;
    lstub_error err;
    LSTUB_INIT(found);
    LSTUB_INIT(err);
    if (!PyArg_ParseTuple(args, "OOOO", &f, &loss, &fit, &out))
        return NULL;
    choice = core_record_get(state, fit, SHAPE_LOSS_FIT, "fit");
    if (choice == NULL || core_buffer_read(f, "freq", &net.in[0]) < 0 ||
        network_reals(state, &net.in[1], loss, "loss", net.in[0].count) < 0 || network_to(&net, 0, out, 'd', net.in[0].count) < 0)
        return network_fail(&net);
    CALL(lstub_insertion_loss_deviation(net.in[0].data, net.in[1].data, net.in[0].count, choice, net.out[0].data, &found, &err))
    none = network_done(state, &net, status, &err, "insertion_loss_deviation", 0);
    Py_XDECREF(none);
    return none == NULL ? NULL : core_unpack(SHAPE_DEVIATION, &found);
}

PyMethodDef core_network_methods[] = {
    {"renormalise", renormalise, METH_VARARGS, NULL},
    {"convert", convert, METH_VARARGS, NULL},
    {"cascade", cascade, METH_VARARGS, NULL},
    {"deembed", deembed, METH_VARARGS, NULL},
    {"shunt", shunt, METH_VARARGS, NULL},
    {"to_mixed", to_mixed, METH_VARARGS, NULL},
    {"to_single", to_single, METH_VARARGS, NULL},
    {"passivity", passivity, METH_VARARGS, NULL},
    {"reciprocity", reciprocity, METH_VARARGS, NULL},
    {"port_map", port_map, METH_VARARGS, NULL},
    {"causality", causality, METH_VARARGS, NULL},
    {"step_response", step_response, METH_VARARGS, NULL},
    {"tdr", tdr, METH_VARARGS, NULL},
    {"insertion_loss_deviation", insertion_loss_deviation, METH_VARARGS, NULL},
    {NULL, NULL, 0, NULL},
};
