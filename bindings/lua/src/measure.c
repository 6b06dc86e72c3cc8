/* From measured curves: notches, and what is fitted to them. */
#include "lslua.h"

#include <string.h>

static const char *const search_keys[] = {"window", "f_low", "f_high", "depth_least", "to", "from", NULL};
static const char *const fit_keys[] = {"with_offset", NULL};
static const char *const coupon_keys[] = {"with_offset", "fidelity", "z_ref", "annuli", NULL};

static const lslua_word flags[] = {
    {"shallow", LSTUB_QUALITY_SHALLOW}, {"edge", LSTUB_QUALITY_EDGE}, {"ripple", LSTUB_QUALITY_RIPPLE},
    {"wide", LSTUB_QUALITY_WIDE}, {"floor", LSTUB_QUALITY_FLOOR}, {NULL, 0}
};

/* ---- notches ---- */

void lslua_push_flags(lua_State *L, const lslua_word *words, int32_t sum)
{
    lua_Integer n = 0;
    lua_newtable(L);
    for (; words->word != NULL; words++)
        if (sum & words->value) {
            lua_pushstring(L, words->word);
            lua_rawseti(L, -2, ++n);
        }
}

static void push_notch(lua_State *L, const lstub_measured_notch *notch)
{
    lua_createtable(L, 0, 11);
    lslua_push_flags(L, flags, notch->quality);
    lua_setfield(L, -2, "quality");
    lslua_set_number(L, "f", notch->f);
    lslua_set_number(L, "f_sigma", notch->f_sigma);
    lslua_set_number(L, "depth_db", notch->depth_db);
    lslua_set_number(L, "level_db", notch->level_db);
    lslua_set_number(L, "f_minimum", notch->f_minimum);
    lslua_set_number(L, "width", notch->width);
    lslua_set_number(L, "q", notch->q);
    lslua_set_number(L, "impedance", notch->impedance);
    lslua_set_number(L, "score", notch->score);
    lslua_set_number(L, "window", notch->window);
}

/* Options at argument 3, which may be none: also the element of the matrices that is meant. */
static int32_t search_option(lua_State *L, int32_t ports, lstub_search *search, int32_t *to, int32_t *from, lstub_error *err)
{
    lslua_at at = {0};
    int named = 0;
    LSTUB_INIT(*search);
    search->allocator = lslua_allocator(L);
    *to = *from = 0;
    if (!lua_isnoneornil(L, 3)) {
        at = lslua_options(L, 3, search_keys);
        lslua_number(&at, "window", &search->window);
        lslua_number(&at, "f_low", &search->f_low);
        lslua_number(&at, "f_high", &search->f_high);
        lslua_number(&at, "depth_least", &search->depth_least);
        named = lslua_port(&at, "to", ports, to, err) + lslua_port(&at, "from", ports, from, err);
    }
    if (ports > 1 && named < 2)
        luaL_argerror(L, 3, "of a network of several ports, 'to' and 'from' must say which element");
    return err->status;
}

/* find_notches(freq, s, options): notches, averaged and trend in dB. */
static int find_notches(lua_State *L)
{
    lslua_network x = lslua_check_network(L, 2);
    lstub_search search;
    lstub_measured_notch *notches;
    const double *freq, *element;
    double *averaged, *trend;
    size_t capacity = 16, count = 0, i, width = 2 * (size_t)x.p * (size_t)x.p * sizeof(double);
    int32_t to, from, status;
    lstub_error err;
    LSTUB_INIT(err);
    lslua_most(L, 3);
    lua_settop(L, 3);
    status = search_option(L, x.p, &search, &to, &from, &err);
    if (status < 0)
        return lslua_fail(L, status, &err);
    freq = lslua_column(L, 1, "freq", x.n);
    element = x.s + 2 * (to * x.p + from);
    averaged = lslua_push_array(L, x.n);
    trend = lslua_push_array(L, x.n);
    lua_insert(L, -2);                       /* trend, averaged */
    for (;;) {
        notches = lslua_scratch(L, capacity, sizeof *notches);
        for (i = 0; i < capacity; i++)
            LSTUB_INIT(notches[i]);
        status = lstub_find_notches(freq, x.n, element, width, &search, notches, capacity, sizeof *notches, &count, averaged,
                                    trend, &err);
        if (count <= capacity)
            break;
        capacity = count;
        lua_pop(L, 1);
    }
    if (status < 0)
        return lslua_fail(L, status, &err);
    lua_createtable(L, (int)count, 0);
    for (i = 0; i < count; i++) {
        push_notch(L, &notches[i]);
        lua_rawseti(L, -2, (lua_Integer)i + 1);
    }
    lua_insert(L, -4);                       /* list, trend, averaged, scratch */
    lua_pop(L, 1);
    lua_insert(L, -2);
    return lslua_done(L, 3, status, &err);
}

/* ---- in-plane Dk ---- */

static void push_fit(lua_State *L, const lstub_fit *fit, int with_offset)
{
    lua_createtable(L, 0, 11);
    lslua_set_boolean(L, "describes", fit->describes);
    lslua_set_integer(L, "dof", fit->dof);
    lslua_set_number(L, "ratio", fit->ratio);
    lslua_set_number(L, "ratio_sigma", fit->ratio_sigma);
    lslua_set_number(L, "ratio_low", fit->ratio_low);
    lslua_set_number(L, "ratio_high", fit->ratio_high);
    lslua_set_number(L, "chi2", fit->chi2);
    if (!with_offset)
        return;
    lslua_set_number(L, "offset", fit->offset);
    lslua_set_number(L, "offset_sigma", fit->offset_sigma);
    lslua_set_number(L, "offset_low", fit->offset_low);
    lslua_set_number(L, "offset_high", fit->offset_high);
}

typedef struct asking {
    lua_State *L;
    int function, results;      /* stack indices; results: two slots, for an error or a message and its code */
    int raised;                 /* the function has raised the error in the first slot                 */
    int refused;                /* it has returned nil, and perhaps a message and a code               */
} asking;

/* The prediction of one coupon. No error may pass through the library: it is kept. */
static int32_t predict(void *user, double ratio, double offset, size_t coupon, double *f)
{
    asking *a = user;
    lua_State *L = a->L;
    lua_pushvalue(L, a->function);
    lua_pushnumber(L, ratio);
    lua_pushnumber(L, offset);
    lua_pushinteger(L, (lua_Integer)coupon + 1);
    if (lua_pcall(L, 3, 3, 0) != LUA_OK) {
        lua_replace(L, a->results);
        a->raised = 1;
        return LSTUB_E_NONE;
    }
    if (lua_type(L, -3) != LUA_TNUMBER) {
        lua_replace(L, a->results + 1);
        lua_replace(L, a->results);
        a->refused = lua_isnil(L, -1) ? 1 : 2;
        lua_pop(L, 1);
        return LSTUB_E_NONE;
    }
    *f = (double)lua_tonumber(L, -3);
    lua_pop(L, 3);
    return LSTUB_OK;
}

/* What ended the fit from within: its error, its failure, or what is wrong with its answer. */
static int after_asking(const asking *a)
{
    lua_State *L = a->L;
    lua_settop(L, a->results + 1);
    if (a->raised) {
        lua_pushvalue(L, a->results);
        return lua_error(L);
    }
    if (a->refused == 2)
        return luaL_error(L, "the prediction must be a number");
    if (lua_type(L, -2) != LUA_TSTRING || !lua_isinteger(L, -1))
        return luaL_error(L, "the prediction must be a number, or nil, message, code");
    lua_pushnil(L);
    lua_insert(L, -3);
    return 3;
}

/* A copy of the list at argument `arg`, which Lua code that runs meanwhile cannot change. */
static const double *copied(lua_State *L, int arg, const char *what, size_t count)
{
    const double *from = lslua_column(L, arg, what, count);
    double *to = lslua_scratch(L, count, sizeof *to);
    if (count > 0)
        memcpy(to, from, count * sizeof *to);
    return to;
}

static size_t length_of(lua_State *L, int arg)
{
    lslua_at at = {0};
    size_t count;
    at.L = L;
    at.arg = arg;
    lslua_numbers(L, &at, NULL, arg, &count);
    return count;
}

/* fit_in_plane_dk(predict, f, f_sigma, { with_offset = }): the fit, and the residuals. */
static int fit_in_plane_dk(lua_State *L)
{
    asking a;
    lstub_fit fit;
    const double *f, *f_sigma;
    double *residuals;
    size_t count;
    int32_t with_offset = 0, status;
    lstub_error err;
    LSTUB_INIT(err);
    LSTUB_INIT(fit);
    memset(&a, 0, sizeof a);
    luaL_checktype(L, 1, LUA_TFUNCTION);
    lslua_most(L, 4);
    lua_settop(L, 4);
    if (!lua_isnil(L, 4)) {
        lslua_at at = lslua_options(L, 4, fit_keys);
        lslua_boolean(&at, "with_offset", &with_offset);
    }
    count = length_of(L, 2);
    f = copied(L, 2, "f", count);
    f_sigma = copied(L, 3, "f_sigma", count);
    residuals = lslua_push_array(L, count);
    a.L = L;
    a.function = 1;
    lua_pushnil(L);
    lua_pushnil(L);
    a.results = lua_gettop(L) - 1;
    luaL_checkstack(L, 8, NULL);
    status = lstub_fit_in_plane_dk(predict, &a, f, f_sigma, count, with_offset, &fit, residuals, &err);
    if (a.raised || a.refused)
        return after_asking(&a);
    if (status < 0)
        return lslua_fail(L, status, &err);
    push_fit(L, &fit, with_offset);
    lua_pushvalue(L, a.results - 1);
    return lslua_done(L, 2, status, &err);
}

/* fit_coupons(stackup, vias, f, f_sigma, options): the fit, the residuals, and the stackup with it. */
static int fit_coupons(lua_State *L)
{
    lstub_model_options options;
    lstub_allocator allocator;
    lstub_stackup *made = NULL;
    lstub_fit fit;
    const lstub_via *vias;
    const double *f, *f_sigma;
    double *residuals;
    lslua_object *object;
    size_t count;
    int32_t with_offset = 0, status;
    lstub_error err;
    int at_residuals;
    LSTUB_INIT(err);
    LSTUB_INIT(fit);
    lslua_stackup(L, 1, 1);
    lslua_most(L, 5);
    lua_settop(L, 5);
    lslua_model_defaults(L, &options);
    if (!lua_isnil(L, 5)) {
        lslua_at at = lslua_options(L, 5, coupon_keys);
        lslua_boolean(&at, "with_offset", &with_offset);
        lslua_model_options(&at, &options);
    }
    vias = lslua_vias(L, 2, 1, &count);
    f = lslua_column(L, 3, "f", count);
    f_sigma = lslua_column(L, 4, "f_sigma", count);
    residuals = lslua_push_array(L, count);
    at_residuals = lua_gettop(L);
    object = lslua_push_stackup(L, &allocator);
    status = lstub_fit_coupons(lslua_stackup(L, 1, 1), vias, count, sizeof *vias, f, f_sigma, with_offset, &options, &allocator,
                               &made, &fit, residuals, &err);
    object->handle = made;
    if (status < 0)
        return lslua_fail(L, status, &err);
    lslua_fill_names(L);
    lslua_charge(L, object);
    push_fit(L, &fit, with_offset);
    lua_pushvalue(L, at_residuals);
    lua_pushvalue(L, at_residuals + 1);
    return lslua_done(L, 3, status, &err);
}

const luaL_Reg lslua_measures[] = {
    {"find_notches", find_notches}, {"fit_in_plane_dk", fit_in_plane_dk}, {"fit_coupons", fit_coupons}, {NULL, NULL}
};
