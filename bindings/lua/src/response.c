/* Networks over time, whether they are causal, and how far a loss is from smooth. */
#include "lslua.h"

static const char *const step_keys[] = {"to", "from", "rise_time", NULL};
static const char *const tdr_keys[] = {"port", "z_ref", "rise_time", NULL};
static const char *const fit_keys[] = {
    "f_low", "f_high", "constant", "weighted", "symbol_rate", "transition_time", "receiver_bandwidth", NULL
};

/* The times at argument 3. */
static const double *times(lua_State *L, size_t *m)
{
    lslua_at at = {0};
    at.L = L;
    at.arg = 3;
    return lslua_numbers(L, &at, NULL, 3, m);
}

/* causality(freq, s, t0): early[to][from], resolution. */
static int network_causality(lua_State *L)
{
    lslua_network x = lslua_check_network(L, 2);
    const double *freq;
    double t0 = 0.0, resolution, *early;
    lstub_error err;
    int32_t status, i, k;
    LSTUB_INIT(err);
    lslua_most(L, 3);
    if (!lua_isnoneornil(L, 3)) {
        luaL_checktype(L, 3, LUA_TNUMBER);
        t0 = (double)lua_tonumber(L, 3);
    }
    freq = lslua_column(L, 1, "freq", x.n);
    early = lslua_scratch(L, (size_t)(x.p * x.p), sizeof *early);
    status = lstub_network_causality(freq, x.s, x.n, x.p, t0, early, &resolution, &err);
    if (status < 0)
        return lslua_fail(L, status, &err);
    lua_createtable(L, x.p, 0);
    for (i = 0; i < x.p; i++) {
        double *row = lslua_push_array(L, (size_t)x.p);
        for (k = 0; k < x.p; k++)
            row[k] = early[i * x.p + k];
        lua_rawseti(L, -2, (lua_Integer)i + 1);
    }
    lua_pushnumber(L, resolution);
    return lslua_done(L, 2, status, &err);
}

/* step_response(freq, s, t, { to =, from =, rise_time = }) */
static int step_response(lua_State *L)
{
    lslua_network x = lslua_check_network(L, 2);
    lslua_at at = lslua_options(L, 4, step_keys);
    int32_t to = x.p > 1, from = 0, status;
    const double *freq, *t;
    double rise_time = 0.0, *out;
    size_t m;
    lstub_error err;
    LSTUB_INIT(err);
    lslua_most(L, 4);
    lslua_need(&at, "rise_time", lslua_number(&at, "rise_time", &rise_time));
    lslua_port(&at, "to", x.p, &to, &err);
    lslua_port(&at, "from", x.p, &from, &err);
    if (err.status < 0)
        return lslua_fail(L, err.status, &err);
    freq = lslua_column(L, 1, "freq", x.n);
    t = times(L, &m);
    out = lslua_push_array(L, m);
    status = lstub_step_response(freq, x.s, x.n, x.p, to, from, rise_time, t, m, out, &err);
    return status < 0 ? lslua_fail(L, status, &err) : lslua_done(L, 1, status, &err);
}

/* tdr(freq, s, t, { port =, z_ref =, rise_time = }) */
static int tdr(lua_State *L)
{
    lslua_network x = lslua_check_network(L, 2);
    lslua_at at = lslua_options(L, 4, tdr_keys);
    int32_t port = 0, status;
    const double *freq, *t;
    double rise_time = 0.0, z_ref = 50.0, *out;
    size_t m;
    lstub_error err;
    LSTUB_INIT(err);
    lslua_most(L, 4);
    lslua_need(&at, "rise_time", lslua_number(&at, "rise_time", &rise_time));
    lslua_number(&at, "z_ref", &z_ref);
    lslua_port(&at, "port", x.p, &port, &err);
    if (err.status < 0)
        return lslua_fail(L, err.status, &err);
    freq = lslua_column(L, 1, "freq", x.n);
    t = times(L, &m);
    out = lslua_push_array(L, m);
    status = lstub_tdr(freq, x.s, x.n, x.p, port, z_ref, rise_time, t, m, out, &err);
    return status < 0 ? lslua_fail(L, status, &err) : lslua_done(L, 1, status, &err);
}

static void read_fit(lua_State *L, int arg, lstub_loss_fit *fit)
{
    lslua_at at;
    LSTUB_INIT(*fit);
    if (lua_isnoneornil(L, arg))
        return;
    at = lslua_options(L, arg, fit_keys);
    lslua_number(&at, "f_low", &fit->f_low);
    lslua_number(&at, "f_high", &fit->f_high);
    lslua_boolean(&at, "constant", &fit->constant);
    lslua_boolean(&at, "weighted", &fit->weighted);
    lslua_number(&at, "symbol_rate", &fit->symbol_rate);
    lslua_number(&at, "transition_time", &fit->transition_time);
    lslua_number(&at, "receiver_bandwidth", &fit->receiver_bandwidth);
}

/* insertion_loss_deviation(freq, loss, fit): the fit, and the deviation at each frequency. */
static int insertion_loss_deviation(lua_State *L)
{
    lslua_at at = {0};
    lstub_loss_fit fit;
    lstub_loss_deviation result;
    const double *freq, *loss;
    double *deviation;
    size_t n;
    lstub_error err;
    int32_t status;
    LSTUB_INIT(err);
    LSTUB_INIT(result);
    lslua_most(L, 3);
    read_fit(L, 3, &fit);
    at.L = L;
    at.arg = 1;
    lua_settop(L, 3);
    freq = lslua_numbers(L, &at, NULL, 1, &n);
    loss = lslua_column(L, 2, "loss", n);
    lua_createtable(L, 0, 8);
    deviation = lslua_push_array(L, n);
    lua_insert(L, -2);
    status = lstub_insertion_loss_deviation(freq, loss, n, &fit, deviation, &result, &err);
    if (status < 0)
        return lslua_fail(L, status, &err);
    lslua_set_number(L, "a0", result.a0);
    lslua_set_number(L, "a1", result.a1);
    lslua_set_number(L, "a2", result.a2);
    lslua_set_number(L, "a4", result.a4);
    lslua_set_number(L, "rms", result.rms);
    lslua_set_number(L, "greatest", result.greatest);
    lslua_set_number(L, "fom", result.fom);
    lslua_set_integer(L, "points", result.points);
    lua_insert(L, -2);
    return lslua_done(L, 2, status, &err);
}

const luaL_Reg lslua_responses[] = {
    {"causality", network_causality}, {"step_response", step_response}, {"tdr", tdr},
    {"insertion_loss_deviation", insertion_loss_deviation}, {NULL, NULL}
};
