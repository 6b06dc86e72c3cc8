/* Signals, criteria, margins and the inverse questions. */
#include "lslua.h"


static const char *const signal_keys[] = {"symbol_rate", "levels", NULL};
static const char *const criteria_keys[] = {"notch_over_nyquist", "added_loss_db", NULL};
static const char *const longest_keys[] = {"side", "fidelity", "z_ref", "annuli", NULL};

static const lslua_word limits[] = {
    {"none", LSTUB_LIMIT_NONE}, {"notch", LSTUB_LIMIT_NOTCH}, {"loss", LSTUB_LIMIT_LOSS}, {NULL, 0}
};

/* ---- tables in and out ---- */

void lslua_read_signal(const lslua_at *at, lstub_signal *signal)
{
    LSTUB_INIT(*signal);
    lslua_check_keys(at, signal_keys);
    lslua_need(at, "symbol_rate", lslua_number(at, "symbol_rate", &signal->symbol_rate));
    lslua_integer(at, "levels", &signal->levels);
}

void lslua_read_criteria(const lslua_at *at, lstub_criteria *criteria)
{
    LSTUB_INIT(*criteria);
    lslua_check_keys(at, criteria_keys);
    lslua_number(at, "notch_over_nyquist", &criteria->notch_over_nyquist);
    lslua_number(at, "added_loss_db", &criteria->added_loss_db);
}

void lslua_push_signal(lua_State *L, const lstub_signal *signal)
{
    lua_createtable(L, 0, 2);
    lslua_set_number(L, "symbol_rate", signal->symbol_rate);
    lslua_set_integer(L, "levels", signal->levels == 0 ? 2 : signal->levels);
}

void lslua_push_criteria(lua_State *L, const lstub_criteria *criteria)
{
    lua_createtable(L, 0, 2);
    if (criteria->notch_over_nyquist > 0.0)
        lslua_set_number(L, "notch_over_nyquist", criteria->notch_over_nyquist);
    if (criteria->added_loss_db > 0.0)
        lslua_set_number(L, "added_loss_db", criteria->added_loss_db);
}

void lslua_push_margin(lua_State *L, const lstub_margin *margin)
{
    lua_createtable(L, 0, 11);
    lslua_set_boolean(L, "pass", margin->pass);
    lslua_set_string(L, "limited_by", lslua_word_of(limits, margin->limited_by));
    lslua_set_number(L, "nyquist", margin->nyquist);
    lslua_set_number(L, "f1", margin->f1);
    lslua_set_number(L, "notch_over_nyquist", margin->notch_over_nyquist);
    lslua_set_number(L, "notch_margin", margin->notch_margin);
    lslua_set_number(L, "added_loss_db", margin->added_loss_db);
    lslua_set_number(L, "loss_margin_db", margin->loss_margin_db);
    lslua_set_number(L, "stub_length", margin->stub_length);
    lslua_set_number(L, "rule_length", margin->rule_length);
    lslua_set_number(L, "rule_margin", margin->rule_margin);
}

static void push_limit(lua_State *L, const lstub_stub_limit *limit)
{
    lua_createtable(L, 0, 4);
    lslua_set_string(L, "limited_by", lslua_word_of(limits, limit->limited_by));
    lslua_set_number(L, "length", limit->length);
    lslua_set_number(L, "stub_length", limit->stub_length);
    lslua_set_number(L, "margin", limit->margin);
}

static lslua_at table_argument(lua_State *L, int arg)
{
    lslua_at at = {0};
    luaL_checktype(L, arg, LUA_TTABLE);
    at.L = L;
    at.arg = arg;
    at.table = arg;
    return at;
}

static void signal_argument(lua_State *L, int arg, lstub_signal *signal)
{
    lslua_at at = table_argument(L, arg);
    lslua_read_signal(&at, signal);
}

static void criteria_argument(lua_State *L, int arg, lstub_criteria *criteria)
{
    lslua_at at = table_argument(L, arg);
    lslua_read_criteria(&at, criteria);
}

/* ---- one signal ---- */

static int of_signal(lua_State *L, int32_t (*call)(const lstub_signal *, double *, lstub_error *))
{
    lstub_signal signal;
    lstub_error err;
    double value;
    int32_t status;
    LSTUB_INIT(err);
    lslua_most(L, 1);
    signal_argument(L, 1, &signal);
    status = call(&signal, &value, &err);
    if (status < 0)
        return lslua_fail(L, status, &err);
    lua_pushnumber(L, value);
    return lslua_done(L, 1, status, &err);
}

int lslua_signal_nyquist(lua_State *L) { return of_signal(L, lstub_signal_nyquist); }
int lslua_signal_bit_rate(lua_State *L) { return of_signal(L, lstub_signal_bit_rate); }

int lslua_model_margin(lua_State *L)
{
    lstub_signal signal;
    lstub_criteria criteria;
    lstub_margin margin;
    lstub_error err;
    int32_t status;
    LSTUB_INIT(err);
    LSTUB_INIT(margin);
    lslua_handle(L, 1, 1, LSLUA_MODEL);
    lslua_most(L, 3);
    signal_argument(L, 2, &signal);
    criteria_argument(L, 3, &criteria);
    status = lstub_model_margin(lslua_handle(L, 1, 1, LSLUA_MODEL), &signal, &criteria, &margin, &err);
    if (status < 0)
        return lslua_fail(L, status, &err);
    lslua_push_margin(L, &margin);
    return lslua_done(L, 1, status, &err);
}

int lslua_highest_symbol_rate(lua_State *L)
{
    lstub_criteria criteria;
    lstub_error err;
    double rate;
    int32_t limited_by, status;
    LSTUB_INIT(err);
    lslua_handle(L, 1, 1, LSLUA_MODEL);
    lslua_most(L, 2);
    criteria_argument(L, 2, &criteria);
    status = lstub_highest_symbol_rate(lslua_handle(L, 1, 1, LSLUA_MODEL), &criteria, &rate, &limited_by, &err);
    if (status < 0)
        return lslua_fail(L, status, &err);
    lua_pushnumber(L, rate);
    lua_pushstring(L, lslua_word_of(limits, limited_by));
    return lslua_done(L, 2, status, &err);
}

/* The side that was asked for; else that of the only stub. */
static int32_t side_of(lua_State *L, const lslua_at *at, const lstub_stackup *stackup, const lslua_via *v, int32_t *side,
                       lstub_error *err)
{
    lstub_stub stubs[2];
    int32_t count = 0, status;
    if (at->L != NULL && lslua_word_field(at, "side", lslua_sides, side))
        return LSTUB_OK;
    LSTUB_INIT(stubs[0]);
    LSTUB_INIT(stubs[1]);
    status = lstub_via_stubs(stackup, &v->via, stubs, sizeof stubs[0], &count, err);
    if (status < 0)
        return status;
    if (count == 0)
        return lslua_refuse(err, LSTUB_E_NONE, "the via has no stub");
    if (count == 2)
        luaL_argerror(L, 4, "the via has two stubs: { side = 'top' } or { side = 'bottom' } must say which");
    *side = stubs[0].side;
    return LSTUB_OK;
}

/* longest_stub(via, signal, criteria, options) */
int lslua_longest_stub(lua_State *L)
{
    const lslua_via *v = lslua_check_via(L, 1);
    lslua_at at = {0};
    lstub_signal signal;
    lstub_criteria criteria;
    lstub_model_options options;
    lstub_stub_limit limit;
    lstub_error err;
    int32_t side = 0, status;
    LSTUB_INIT(err);
    LSTUB_INIT(limit);
    lslua_model_defaults(L, &options);
    lslua_most(L, 4);
    signal_argument(L, 2, &signal);
    criteria_argument(L, 3, &criteria);
    if (!lua_isnoneornil(L, 4)) {
        at = lslua_options(L, 4, longest_keys);
        lslua_model_options(&at, &options);
    }
    lua_settop(L, 4);
    lua_getiuservalue(L, 1, 1);
    status = side_of(L, &at, lslua_stackup(L, 5, 0), v, &side, &err);
    if (status == LSTUB_OK)
        status = lstub_longest_stub(lslua_stackup(L, 5, 0), &v->via, side, &options, &signal, &criteria, &limit, &err);
    if (status < 0)
        return lslua_fail(L, status, &err);
    push_limit(L, &limit);
    return lslua_done(L, 1, status, &err);
}

/* ---- batches: one value for all, or a list as long as the vias ---- */

/* Whether the table at `arg` is a list. Without vias an empty table is one. */
static int is_list(lua_State *L, int arg, size_t count)
{
    luaL_checktype(L, arg, LUA_TTABLE);
    return lua_rawlen(L, arg) > 0 || count == 0;
}

static void check_length(lua_State *L, int arg, const char *what, size_t count)
{
    size_t n = (size_t)lua_rawlen(L, arg);
    if (n != count)
        luaL_argerror(L, arg, lua_pushfstring(L, "%s: %I items for %I vias", what, (LUAI_UACINT)n, (LUAI_UACINT)count));
}

static const lstub_signal *signals_argument(lua_State *L, int arg, size_t count, size_t *stride)
{
    lstub_signal *signals;
    size_t i;
    *stride = 0;
    if (!is_list(L, arg, count)) {
        signals = lslua_scratch(L, 1, sizeof *signals);
        signal_argument(L, arg, signals);
        return signals;
    }
    check_length(L, arg, "signals", count);
    *stride = sizeof *signals;
    signals = lslua_scratch(L, count, sizeof *signals);
    for (i = 0; i < count; i++) {
        lslua_at at = table_argument(L, arg);
        at.list = "signals";
        at.item = (lua_Integer)i + 1;
        if (lua_rawgeti(L, arg, at.item) != LUA_TTABLE)
            lslua_wrong_type(&at, NULL, "table", -1);
        at.table = lua_gettop(L);
        lslua_read_signal(&at, &signals[i]);
        lua_pop(L, 1);
    }
    return signals;
}

static const lstub_criteria *criteria_list_argument(lua_State *L, int arg, size_t count, size_t *stride)
{
    lstub_criteria *criteria;
    size_t i;
    *stride = 0;
    if (!is_list(L, arg, count)) {
        criteria = lslua_scratch(L, 1, sizeof *criteria);
        criteria_argument(L, arg, criteria);
        return criteria;
    }
    check_length(L, arg, "criteria", count);
    *stride = sizeof *criteria;
    criteria = lslua_scratch(L, count, sizeof *criteria);
    for (i = 0; i < count; i++) {
        lslua_at at = table_argument(L, arg);
        at.list = "criteria";
        at.item = (lua_Integer)i + 1;
        if (lua_rawgeti(L, arg, at.item) != LUA_TTABLE)
            lslua_wrong_type(&at, NULL, "table", -1);
        at.table = lua_gettop(L);
        lslua_read_criteria(&at, &criteria[i]);
        lua_pop(L, 1);
    }
    return criteria;
}

static const int32_t *sides_argument(lua_State *L, int arg, size_t count, size_t *stride)
{
    lslua_at at = {0};
    int32_t *sides;
    size_t i;
    at.L = L;
    at.arg = arg;
    *stride = 0;
    if (lua_type(L, arg) == LUA_TSTRING) {
        sides = lslua_scratch(L, 1, sizeof *sides);
        *sides = lslua_word_at(&at, NULL, lslua_sides, arg);
        return sides;
    }
    luaL_checktype(L, arg, LUA_TTABLE);
    check_length(L, arg, "sides", count);
    *stride = sizeof *sides;
    sides = lslua_scratch(L, count, sizeof *sides);
    at.list = "sides";
    for (i = 0; i < count; i++) {
        at.item = (lua_Integer)i + 1;
        lua_rawgeti(L, arg, at.item);
        sides[i] = lslua_word_at(&at, NULL, lslua_sides, -1);
        lua_pop(L, 1);
    }
    return sides;
}

/* longest_stub_batch(stackup, vias, sides, signals, criteria, options): a list of limits with their status. */
int lslua_longest_stub_batch(lua_State *L)
{
    lstub_model_options options;
    lstub_error err;
    const lstub_via *vias;
    const int32_t *sides;
    const lstub_signal *signals;
    const lstub_criteria *criteria;
    lstub_stub_limit *out;
    int32_t *each, status;
    size_t i, n, side_stride, signal_stride, criteria_stride;
    LSTUB_INIT(err);
    lslua_stackup(L, 1, 1);
    lslua_most(L, 6);
    lslua_model_argument(L, 6, &options);
    lua_settop(L, 6);
    vias = lslua_vias(L, 2, 1, &n);
    sides = sides_argument(L, 3, n, &side_stride);
    signals = signals_argument(L, 4, n, &signal_stride);
    criteria = criteria_list_argument(L, 5, n, &criteria_stride);
    each = lslua_new_status(L, n);
    out = lslua_scratch(L, n, sizeof *out);
    for (i = 0; i < n; i++)
        LSTUB_INIT(out[i]);
    status = lstub_longest_stub_batch(lslua_stackup(L, 1, 1), vias, sizeof *vias, sides, side_stride, signals,
                                      signal_stride, criteria, criteria_stride, n, &options, out, sizeof *out, each, &err);
    if (lslua_batch_failed(L, status, each, n))
        return lslua_fail(L, status, &err);
    lua_createtable(L, (int)n, 0);
    for (i = 0; i < n; i++) {
        if (each[i] >= 0)
            push_limit(L, &out[i]);
        else
            lua_createtable(L, 0, 1);
        lslua_set_integer(L, "status", each[i]);
        lua_rawseti(L, -2, (lua_Integer)i + 1);
    }
    return lslua_done(L, 1, status, &err);
}

/* margin_batch(stackup, vias, signals, criteria, options): a list of margins with their status. */
int lslua_margin_batch(lua_State *L)
{
    lstub_model_options options;
    lstub_error err;
    const lstub_via *vias;
    const lstub_signal *signals;
    const lstub_criteria *criteria;
    lstub_margin *out;
    int32_t *each, status;
    size_t i, n, signal_stride, criteria_stride;
    LSTUB_INIT(err);
    lslua_stackup(L, 1, 1);
    lslua_most(L, 5);
    lslua_model_argument(L, 5, &options);
    lua_settop(L, 5);
    vias = lslua_vias(L, 2, 1, &n);
    signals = signals_argument(L, 3, n, &signal_stride);
    criteria = criteria_list_argument(L, 4, n, &criteria_stride);
    each = lslua_new_status(L, n);
    out = lslua_scratch(L, n, sizeof *out);
    for (i = 0; i < n; i++)
        LSTUB_INIT(out[i]);
    status = lstub_margin_batch(lslua_stackup(L, 1, 1), vias, sizeof *vias, signals, signal_stride, criteria,
                                criteria_stride, n, &options, out, sizeof *out, each, &err);
    if (lslua_batch_failed(L, status, each, n))
        return lslua_fail(L, status, &err);
    lua_createtable(L, (int)n, 0);
    for (i = 0; i < n; i++) {
        if (each[i] >= 0)
            lslua_push_margin(L, &out[i]);
        else
            lua_createtable(L, 0, 1);
        lslua_set_integer(L, "status", each[i]);
        lua_rawseti(L, -2, (lua_Integer)i + 1);
    }
    return lslua_done(L, 1, status, &err);
}
