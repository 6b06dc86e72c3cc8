/* Sums on S-parameters and other matrices: libstub.complex in and out. */
#include "lslua.h"

static const lslua_word kinds[] = {
    {"S", LSTUB_NETWORK_S}, {"Z", LSTUB_NETWORK_Z}, {"Y", LSTUB_NETWORK_Y}, {"ABCD", LSTUB_NETWORK_ABCD},
    {"G", LSTUB_NETWORK_G}, {"H", LSTUB_NETWORK_H}, {NULL, 0}
};

/* ---- arguments ---- */

static lslua_at argument(lua_State *L, int arg)
{
    lslua_at at = {0};
    at.L = L;
    at.arg = arg;
    return at;
}

lslua_network lslua_check_network(lua_State *L, int arg)
{
    lslua_at at = argument(L, arg);
    lslua_network x;
    x.s = lslua_complex(L, &at, NULL, arg, &x.n, &x.p);
    return x;
}

/* Another network of the same size; null where there is none and none is needed. */
static const double *same_size(lua_State *L, int arg, const lslua_network *as)
{
    lslua_network x;
    if (lua_isnoneornil(L, arg))
        return NULL;
    x = lslua_check_network(L, arg);
    if (x.n != as->n || x.p != as->p)
        luaL_argerror(L, arg, lua_pushfstring(L, "%I matrices of %d ports beside %I of %d", (LUAI_UACINT)x.n, (int)x.p,
                                              (LUAI_UACINT)as->n, (int)as->p));
    return x.s;
}

const double *lslua_column(lua_State *L, int arg, const char *what, size_t count)
{
    lslua_at at = argument(L, arg);
    size_t n;
    const double *list = lslua_numbers(L, &at, NULL, arg, &n);
    if (n != count)
        luaL_argerror(L, arg, lua_pushfstring(L, "%s: %I numbers, %I needed", what, (LUAI_UACINT)n, (LUAI_UACINT)count));
    return list;
}

#define REFERENCE 50.0          /* ohm, where nothing else is said                                     */

/* Reference impedances at argument `arg`: one for all ports, or a list. Pushes scratch. */
static const double *references(lua_State *L, int arg, const char *what, int32_t p)
{
    double *z;
    int32_t i;
    if (!lua_isnoneornil(L, arg) && lua_type(L, arg) != LUA_TNUMBER)
        return lslua_column(L, arg, what, (size_t)p);
    z = lslua_scratch(L, (size_t)p, sizeof *z);
    for (i = 0; i < p; i++)
        z[i] = lua_isnoneornil(L, arg) ? REFERENCE : (double)lua_tonumber(L, arg);
    return z;
}

/* The port at the top of the stack, counted from 1, as one from 0; pops it. `used` has a bit for each port seen. */
static int32_t take_port(const lslua_at *at, int32_t ports, uint32_t *used, int32_t *port, lstub_error *err)
{
    lua_State *L = at->L;
    int exact = 0;
    lua_Integer n;
    if (lua_type(L, -1) != LUA_TNUMBER)
        lslua_wrong_type(at, NULL, "number of a port", -1);
    n = lua_tointegerx(L, -1, &exact);
    if (!exact)
        lslua_complain(at, NULL, "integer expected, got %s", luaL_tolstring(L, -1, NULL));
    lua_pop(L, 1);
    if (n < 1 || n > ports)
        return lslua_refuse(err, LSTUB_E_ARGUMENT, "%s[%lld]: port %lld: must be 1 to %ld", at->list, (long long)at->item,
                            (long long)n, (long)ports);
    if (*used >> (n - 1) & 1u)
        return lslua_refuse(err, LSTUB_E_ARGUMENT, "%s[%lld]: port %lld: must stand in one place only", at->list,
                            (long long)at->item, (long long)n);
    *used |= 1u << (n - 1);
    *port = (int32_t)(n - 1);
    return LSTUB_OK;
}

/* { { positive, negative }, ... } at argument `arg`. Pushes scratch. */
static int32_t read_pairs(lua_State *L, int arg, int32_t ports, const int32_t **pairs, int32_t *count, lstub_error *err)
{
    lslua_at at = argument(L, arg);
    uint32_t used = 0;
    int32_t *to, status = LSTUB_OK;
    lua_Integer n, i;
    luaL_checktype(L, arg, LUA_TTABLE);
    n = (lua_Integer)lua_rawlen(L, arg);
    at.list = "pairs";
    to = lslua_scratch(L, (size_t)n, 2 * sizeof *to);
    *pairs = to;
    *count = (int32_t)n;
    for (i = 0; i < n && status == LSTUB_OK; i++) {
        int k;
        at.item = i + 1;
        if (lua_rawgeti(L, arg, at.item) != LUA_TTABLE)
            lslua_wrong_type(&at, NULL, "table", -1);
        if (lua_rawlen(L, -1) != 2)
            lslua_complain(&at, NULL, "{ positive, negative } expected, got %d items", (int)lua_rawlen(L, -1));
        for (k = 0; k < 2 && status == LSTUB_OK; k++) {
            lua_rawgeti(L, -1, k + 1);
            status = take_port(&at, ports, &used, &to[2 * i + k], err);
        }
        lua_pop(L, 1);
    }
    return status;
}

/* ---- one network in, one out ---- */

/* renormalise(s, z_from, z_to) */
static int network_renormalise(lua_State *L)
{
    lslua_network x = lslua_check_network(L, 1);
    const double *from, *to;
    double *out;
    int32_t *each, status;
    lstub_error err;
    LSTUB_INIT(err);
    lslua_most(L, 3);
    luaL_checkany(L, 3);
    from = references(L, 2, "z_from", x.p);
    to = references(L, 3, "z_to", x.p);
    each = lslua_new_status(L, x.n);
    out = lslua_push_complex(L, x.n, x.p);
    status = lstub_network_renormalise(x.s, x.n, x.p, from, to, out, each, &err);
    return lslua_items(L, 1, status, each, x.n, &err);
}

/* Complex references at argument `arg`: p for each frequency. */
static const double *complex_references(lua_State *L, int arg, const char *what, const lslua_network *x)
{
    lslua_network z = lslua_check_network(L, arg);
    if (z.p != 1 || z.n != x->n * (size_t)x->p)
        luaL_argerror(L, arg, lua_pushfstring(L, "%s: a list of %I values needed: of each frequency, each port", what,
                                              (LUAI_UACINT)(x->n * (size_t)x->p)));
    return z.s;
}

static int network_renormalise_complex(lua_State *L)
{
    lslua_network x = lslua_check_network(L, 1);
    const double *from, *to;
    double *out;
    int32_t *each, status;
    lstub_error err;
    LSTUB_INIT(err);
    lslua_most(L, 3);
    from = complex_references(L, 2, "z_from", &x);
    to = complex_references(L, 3, "z_to", &x);
    each = lslua_new_status(L, x.n);
    out = lslua_push_complex(L, x.n, x.p);
    status = lstub_network_renormalise_complex(x.s, x.n, x.p, from, to, out, each, &err);
    return lslua_items(L, 1, status, each, x.n, &err);
}

/* convert(s, from, to, z) */
static int network_convert(lua_State *L)
{
    lslua_network x = lslua_check_network(L, 1);
    lslua_at from = argument(L, 2), to = argument(L, 3);
    int32_t *each, status, from_kind, to_kind;
    const double *z;
    double *out;
    lstub_error err;
    LSTUB_INIT(err);
    lslua_most(L, 4);
    lua_settop(L, 4);
    luaL_checktype(L, 2, LUA_TSTRING);
    luaL_checktype(L, 3, LUA_TSTRING);
    from_kind = lslua_word_at(&from, NULL, kinds, 2);
    to_kind = lslua_word_at(&to, NULL, kinds, 3);
    z = references(L, 4, "z", x.p);
    each = lslua_new_status(L, x.n);
    out = lslua_push_complex(L, x.n, x.p);
    status = lstub_network_convert(x.s, x.n, x.p, from_kind, to_kind, z, out, each, &err);
    return lslua_items(L, 1, status, each, x.n, &err);
}

/* port_map(s, map) */
static int port_map(lua_State *L)
{
    lslua_network x = lslua_check_network(L, 1);
    lslua_at at = argument(L, 2);
    uint32_t used = 0;
    int32_t map[LSTUB_PORTS_MAX] = {0}, status = LSTUB_OK;
    lua_Integer count, i;
    double *out;
    lstub_error err;
    LSTUB_INIT(err);
    lslua_most(L, 2);
    luaL_checktype(L, 2, LUA_TTABLE);
    count = (lua_Integer)lua_rawlen(L, 2);
    if (count < 1 || count > x.p)
        status = lslua_refuse(&err, LSTUB_E_ARGUMENT, "map: %lld ports: must be 1 to %ld", (long long)count, (long)x.p);
    at.list = "map";
    for (i = 0; i < count && status == LSTUB_OK; i++) {
        at.item = i + 1;
        lua_rawgeti(L, 2, at.item);
        status = take_port(&at, x.p, &used, &map[i], &err);
    }
    if (status < 0)
        return lslua_fail(L, status, &err);
    out = lslua_push_complex(L, x.n, (int32_t)count);
    status = lstub_port_map(x.s, x.n, x.p, map, (int32_t)count, out, &err);
    return status < 0 ? lslua_fail(L, status, &err) : lslua_done(L, 1, status, &err);
}

/* ---- several ---- */

/* cascade(a, b) */
static int network_cascade(lua_State *L)
{
    lslua_network a = lslua_check_network(L, 1);
    const double *b;
    double *out;
    int32_t *each, status;
    lstub_error err;
    LSTUB_INIT(err);
    lslua_most(L, 2);
    luaL_checkany(L, 2);
    lslua_check_network(L, 2);
    b = same_size(L, 2, &a);
    each = lslua_new_status(L, a.n);
    out = lslua_push_complex(L, a.n, a.p);
    status = lstub_network_cascade(a.s, b, a.n, a.p, out, each, &err);
    return lslua_items(L, 1, status, each, a.n, &err);
}

/* deembed(measured, left, right) */
static int network_deembed(lua_State *L)
{
    lslua_network x = lslua_check_network(L, 1);
    const double *left = same_size(L, 2, &x), *right = same_size(L, 3, &x);
    double *out;
    int32_t *each, status;
    lstub_error err;
    LSTUB_INIT(err);
    lslua_most(L, 3);
    each = lslua_new_status(L, x.n);
    out = lslua_push_complex(L, x.n, x.p);
    status = lstub_network_deembed(x.s, left, right, x.n, x.p, out, each, &err);
    return lslua_items(L, 1, status, each, x.n, &err);
}

/* shunt(zin, z_ref) */
static int network_shunt(lua_State *L)
{
    lslua_network zin = lslua_check_network(L, 1);
    double *out, z_ref = REFERENCE;
    int32_t *each, status;
    lstub_error err;
    LSTUB_INIT(err);
    lslua_most(L, 2);
    luaL_argcheck(L, zin.p == 1, 1, "a list of impedances needed");
    if (!lua_isnoneornil(L, 2)) {
        luaL_checktype(L, 2, LUA_TNUMBER);
        z_ref = (double)lua_tonumber(L, 2);
    }
    each = lslua_new_status(L, zin.n);
    out = lslua_push_complex(L, zin.n, 2);
    status = lstub_network_shunt(zin.s, zin.n, z_ref, out, each, &err);
    return lslua_items(L, 1, status, each, zin.n, &err);
}

/* ---- modes ---- */

static int modes(lua_State *L, int mixed)
{
    lslua_network x = lslua_check_network(L, 1);
    const int32_t *pairs = NULL;
    int32_t *each, status, count = 0;
    const double *z;
    double *out, *z_mixed;
    lstub_error err;
    LSTUB_INIT(err);
    lslua_most(L, 3);
    lua_settop(L, 3);
    z = references(L, 3, "z", x.p);
    status = read_pairs(L, 2, x.p, &pairs, &count, &err);
    if (status < 0)
        return lslua_fail(L, status, &err);
    each = lslua_new_status(L, x.n);
    out = lslua_push_complex(L, x.n, x.p);
    if (!mixed) {
        status = lstub_network_to_single(x.s, x.n, x.p, pairs, count, z, out, each, &err);
        return lslua_items(L, 1, status, each, x.n, &err);
    }
    z_mixed = lslua_push_array(L, (size_t)x.p);
    status = lstub_network_to_mixed(x.s, x.n, x.p, pairs, count, z, out, z_mixed, each, &err);
    return lslua_items(L, 2, status, each, x.n, &err);
}

/* to_mixed(s, pairs, z), to_single(s, pairs, z) */
static int network_to_mixed(lua_State *L) { return modes(L, 1); }
static int network_to_single(lua_State *L) { return modes(L, 0); }

/* ---- checks ---- */

typedef int32_t check(const double *s, size_t n, int32_t p, double *out, int32_t *status, lstub_error *err);

static int check_each(lua_State *L, check *call)
{
    lslua_network x = lslua_check_network(L, 1);
    double *out;
    int32_t *each, status;
    lstub_error err;
    LSTUB_INIT(err);
    lslua_most(L, 1);
    each = lslua_new_status(L, x.n);
    out = lslua_push_array(L, x.n);
    status = call(x.s, x.n, x.p, out, each, &err);
    return lslua_items(L, 1, status, each, x.n, &err);
}

static int network_passivity(lua_State *L) { return check_each(L, lstub_network_passivity); }
static int network_reciprocity(lua_State *L) { return check_each(L, lstub_network_reciprocity); }

const luaL_Reg lslua_networks[] = {
    {"renormalise", network_renormalise}, {"renormalise_complex", network_renormalise_complex},
    {"convert", network_convert}, {"cascade", network_cascade}, {"deembed", network_deembed},
    {"shunt", network_shunt}, {"to_mixed", network_to_mixed}, {"to_single", network_to_single},
    {"passivity", network_passivity}, {"reciprocity", network_reciprocity}, {"port_map", port_map},
    {NULL, NULL}
};
