/* libstub.model: user value 1 is the list of layer names. */
#include "lslua.h"

#include <stdio.h>
#include <string.h>

static const lslua_word fidelities[] = {
    {"default", LSTUB_FIDELITY_DEFAULT}, {"bulk", LSTUB_FIDELITY_BULK}, {"loaded", LSTUB_FIDELITY_LOADED},
    {"ladder", LSTUB_FIDELITY_LADDER}, {"cavity", LSTUB_FIDELITY_CAVITY}, {NULL, 0}
};

static const char *const model_keys[] = {"fidelity", "z_ref", "annuli", NULL};
static const char *const stub_keys[] = {"stub", NULL};

void lslua_model_defaults(lua_State *L, lstub_model_options *options)
{
    LSTUB_INIT(*options);
    options->allocator = lslua_allocator(L);
}

void lslua_model_options(const lslua_at *at, lstub_model_options *options)
{
    lslua_word_field(at, "fidelity", fidelities, &options->fidelity);
    lslua_number(at, "z_ref", &options->z_ref);
    lslua_integer(at, "annuli", &options->annuli);
}

void lslua_model_argument(lua_State *L, int arg, lstub_model_options *options)
{
    lslua_model_defaults(L, options);
    if (!lua_isnoneornil(L, arg)) {
        lslua_at at = lslua_options(L, arg, model_keys);
        lslua_model_options(&at, options);
    }
}

static lstub_model *check_model(lua_State *L)
{
    return lslua_handle(L, 1, 1, LSLUA_MODEL);
}

int lslua_via_model(lua_State *L)
{
    const lslua_via *v = lslua_check_via(L, 1);
    lstub_model_options options;
    lstub_allocator allocator;
    lstub_model *made = NULL;
    lstub_error err;
    lslua_object *object;
    int stackup;
    int32_t status;
    LSTUB_INIT(err);
    lslua_most(L, 2);
    lslua_model_argument(L, 2, &options);
    lua_getiuservalue(L, 1, 1);
    stackup = lua_gettop(L);
    object = lslua_new(L, LSLUA_MODEL, 1, &allocator);
    lslua_push_names(L, stackup);
    lua_setiuservalue(L, -2, 1);
    status = lstub_model_create(lslua_stackup(L, stackup, 0), &v->via, &options, &allocator, &made, &err);
    object->handle = made;
    if (status < 0)
        return lslua_fail(L, status, &err);
    lslua_charge(L, object);
    return lslua_done(L, 1, status, &err);
}

/* The number of a stub, from 0, in the value on top of the stack: from 1, or "all". Pops it. */
static int32_t take_stub(const lslua_at *at, int32_t *stub, lstub_error *err)
{
    lua_State *L = at->L;
    int exact;
    lua_Integer n;
    int32_t count;
    if (lua_type(L, -1) == LUA_TSTRING && strcmp(lua_tostring(L, -1), "all") == 0) {
        lua_pop(L, 1);
        *stub = LSTUB_ALL_STUBS;
        return LSTUB_OK;
    }
    if (lua_type(L, -1) != LUA_TNUMBER)
        lslua_wrong_type(at, "stub", "number of a stub or 'all'", -1);
    n = lua_tointegerx(L, -1, &exact);
    if (!exact)
        lslua_complain(at, "stub", "integer expected, got %s", luaL_tolstring(L, -1, NULL));
    lua_pop(L, 1);
    count = lstub_model_stub_count(check_model(L));
    if (n < 1 || n > count)
        return lslua_refuse(err, LSTUB_E_NONE, "stub %lld: the model has %ld", (long long)n, (long)count);
    *stub = (int32_t)(n - 1);
    return LSTUB_OK;
}

/* { stub = } at argument `arg`, which may be none: all of them. */
static int32_t stub_option(lua_State *L, int arg, int32_t *stub, lstub_error *err)
{
    lslua_at at;
    *stub = LSTUB_ALL_STUBS;
    lslua_most(L, arg);
    if (lua_isnoneornil(L, arg))
        return LSTUB_OK;
    at = lslua_options(L, arg, stub_keys);
    if (lslua_field(&at, "stub"))
        return take_stub(&at, stub, err);
    lua_pop(L, 1);
    return LSTUB_OK;
}

static int32_t stub_argument(lua_State *L, int arg, int32_t *stub, lstub_error *err)
{
    int64_t index;
    check_model(L);
    lslua_most(L, arg);
    if (!lslua_item(L, arg, "stub", lstub_model_stub_count(check_model(L)), &index, err))
        return err->status;
    *stub = (int32_t)index;
    return LSTUB_OK;
}

/* ---- over frequency ---- */

typedef int32_t over_frequency(const lstub_model *model, int32_t stub, const double *freq, size_t n, double *out,
                               int32_t *status, lstub_error *err);

static int one_frequency(lua_State *L, over_frequency *call, int width, int32_t stub)
{
    double freq = (double)lua_tonumber(L, 2), out[2] = {0.0, 0.0};
    lstub_error err;
    int32_t status;
    int i;
    LSTUB_INIT(err);
    status = call(check_model(L), stub, &freq, 1, out, NULL, &err);
    if (status < 0)
        return lslua_fail(L, status, &err);
    for (i = 0; i < width; i++)
        lua_pushnumber(L, out[i]);
    return lslua_done(L, width, status, &err);
}

static int many_frequencies(lua_State *L, over_frequency *call, int width, int32_t stub)
{
    lslua_at at = {0};
    const double *freq;
    double *out;
    int32_t *each, status;
    size_t n;
    lstub_error err;
    LSTUB_INIT(err);
    at.L = L;
    at.arg = 2;
    freq = lslua_numbers(L, &at, NULL, 2, &n);
    each = lslua_scratch(L, n, sizeof *each);
    out = width == 2 ? lslua_push_complex(L, n, 1) : lslua_push_array(L, n);
    status = call(check_model(L), stub, freq, n, out, each, &err);
    if (status < 0)
        return lslua_fail(L, status, &err);
    if (status == LSTUB_OK)
        return 1;
    lslua_done(L, 1, status, &err);
    lslua_push_status(L, each, n);
    return 4;
}

static int frequency_method(lua_State *L, over_frequency *call, int width)
{
    lstub_error err;
    int32_t stub, status;
    LSTUB_INIT(err);
    check_model(L);
    status = stub_option(L, 3, &stub, &err);
    if (status < 0)
        return lslua_fail(L, status, &err);
    if (lua_type(L, 2) == LUA_TNUMBER)
        return one_frequency(L, call, width, stub);
    return many_frequencies(L, call, width, stub);
}

static int model_zin(lua_State *L) { return frequency_method(L, lstub_model_zin, 2); }
static int model_s21(lua_State *L) { return frequency_method(L, lstub_model_s21, 2); }
static int model_added_loss(lua_State *L) { return frequency_method(L, lstub_model_added_loss, 1); }

/* ---- stubs, lines, notches ---- */

static int model_stub_count(lua_State *L)
{
    check_model(L);
    lslua_most(L, 1);
    lua_pushinteger(L, lstub_model_stub_count(check_model(L)));
    return 1;
}

static int model_stub(lua_State *L)
{
    lstub_stub stub;
    lstub_error err;
    int32_t number = 0, status;
    LSTUB_INIT(err);
    LSTUB_INIT(stub);
    status = stub_argument(L, 2, &number, &err);
    if (status == LSTUB_OK)
        status = lstub_model_stub(check_model(L), number, &stub, &err);
    if (status < 0)
        return lslua_fail(L, status, &err);
    lua_getiuservalue(L, 1, 1);
    lslua_push_stub(L, &stub, -1);
    return lslua_done(L, 1, status, &err);
}

static int model_line(lua_State *L)
{
    lstub_stub_line line;
    lstub_error err;
    int32_t number = 0, status;
    LSTUB_INIT(err);
    LSTUB_INIT(line);
    status = stub_argument(L, 2, &number, &err);
    if (status == LSTUB_OK)
        status = lstub_model_line(check_model(L), number, &line, &err);
    if (status < 0)
        return lslua_fail(L, status, &err);
    lua_createtable(L, 0, 9);
    lslua_set_string(L, "fidelity", lslua_word_of(fidelities, line.fidelity));
    lslua_set_number(L, "dk_effective", line.dk_effective);
    lslua_set_number(L, "dk_line", line.dk_line);
    lslua_set_number(L, "impedance", line.impedance);
    lslua_set_number(L, "inductance", line.inductance);
    lslua_set_number(L, "capacitance", line.capacitance);
    lslua_set_number(L, "end_capacitance", line.end_capacitance);
    lslua_set_number(L, "stated_error", line.stated_error);
    lslua_set_number(L, "f_range", line.f_range);
    return lslua_done(L, 1, status, &err);
}

void lslua_push_notches(lua_State *L, const lstub_notch *notches, size_t count)
{
    size_t i;
    lua_createtable(L, (int)count, 0);
    for (i = 0; i < count; i++) {
        lua_createtable(L, 0, 6);
        if (notches[i].stub >= 0)
            lslua_set_integer(L, "stub", (int64_t)notches[i].stub + 1);
        lslua_set_number(L, "f", notches[i].f);
        lslua_set_number(L, "f_series", notches[i].f_series);
        lslua_set_number(L, "depth_db", notches[i].depth_db);
        lslua_set_number(L, "q", notches[i].q);
        lslua_set_number(L, "error", notches[i].error);
        lua_rawseti(L, -2, (lua_Integer)i + 1);
    }
}

/* notches(f_max, options): all of them, however many. */
static int model_notches(lua_State *L)
{
    lstub_notch *notches;
    size_t capacity = 16, count = 0;
    lstub_error err;
    int32_t stub, status;
    double f_max;
    LSTUB_INIT(err);
    check_model(L);
    luaL_checktype(L, 2, LUA_TNUMBER);
    f_max = (double)lua_tonumber(L, 2);
    status = stub_option(L, 3, &stub, &err);
    if (status < 0)
        return lslua_fail(L, status, &err);
    for (;;) {
        size_t i;
        notches = lslua_scratch(L, capacity, sizeof *notches);
        for (i = 0; i < capacity; i++)
            LSTUB_INIT(notches[i]);
        status = lstub_model_notches(check_model(L), stub, f_max, notches, capacity, sizeof *notches, &count, &err);
        if (count <= capacity)
            break;
        capacity = count;
        lua_pop(L, 1);
    }
    if (status < 0)
        return lslua_fail(L, status, &err);
    lslua_push_notches(L, notches, count);
    return lslua_done(L, 1, status, &err);
}

/* first_notch_batch(stackup, vias, options): columns. */
int lslua_first_notch_batch(lua_State *L)
{
    lstub_model_options options;
    lstub_error err;
    const lstub_via *vias;
    double *f1, *dk, *length;
    int32_t *each, status;
    size_t n;
    int columns;
    LSTUB_INIT(err);
    lslua_stackup(L, 1, 1);
    lslua_most(L, 3);
    lslua_model_argument(L, 3, &options);
    vias = lslua_vias(L, 2, 1, &n);
    each = lslua_new_status(L, n);
    lua_createtable(L, 0, 4);
    columns = lua_gettop(L);
    f1 = lslua_push_array(L, n);
    lua_setfield(L, columns, "f1");
    dk = lslua_push_array(L, n);
    lua_setfield(L, columns, "dk_effective");
    length = lslua_push_array(L, n);
    lua_setfield(L, columns, "length");
    status = lstub_first_notch_batch(lslua_stackup(L, 1, 1), vias, n, sizeof *vias, &options, f1, dk, length, each, &err);
    if (lslua_batch_failed(L, status, each, n))
        return lslua_fail(L, status, &err);
    lslua_push_status(L, each, n);
    lua_setfield(L, columns, "status");
    return lslua_done(L, 1, status, &err);
}

/* ---- life ---- */

static void destroy(void *handle) { lstub_model_destroy(handle); }
static int model_close(lua_State *L) { return lslua_close(L, LSLUA_MODEL, destroy); }

static int model_tostring(lua_State *L)
{
    const lslua_object *object = luaL_checkudata(L, 1, LSLUA_MODEL);
    int32_t n;
    if (object->handle == NULL) {
        lua_pushliteral(L, LSLUA_MODEL " (closed)");
        return 1;
    }
    n = lstub_model_stub_count(object->handle);
    lua_pushfstring(L, "%s: %d %s", LSLUA_MODEL, (int)n, n == 1 ? "stub" : "stubs");
    return 1;
}

void lslua_open_model(lua_State *L)
{
    static const luaL_Reg methods[] = {
        {"stub_count", model_stub_count}, {"stub", model_stub}, {"line", model_line}, {"zin", model_zin},
        {"s21", model_s21}, {"added_loss", model_added_loss}, {"notches", model_notches},
        {"margin", lslua_model_margin}, {"highest_symbol_rate", lslua_highest_symbol_rate}, {NULL, NULL}
    };
    lslua_type(L, LSLUA_MODEL, methods, model_close, model_tostring, NULL);
}
