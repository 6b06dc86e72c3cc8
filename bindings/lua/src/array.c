/* Arrays of doubles: libstub.array, and libstub.complex with (re, im) pairs, one or a matrix of them at each index. */
#include "lslua.h"

#include <limits.h>
#include <math.h>
#include <string.h>

typedef struct array {
    size_t count;               /* numbers; of complex: pairs, or matrices                             */
    size_t ports;               /* of complex: rows and columns of each matrix; 1: a plain list        */
    double value[1];
} array;

static double *push(lua_State *L, const char *type, size_t count, size_t ports, size_t width)
{
    array *a;
    width *= ports * ports;
    if (count > (size_t)-1 / 4 / sizeof a->value / width)
        luaL_error(L, "not enough memory");
    a = lua_newuserdatauv(L, sizeof *a + width * count * sizeof a->value[0], 0);
    memset(a, 0, sizeof *a + width * count * sizeof a->value[0]);
    a->count = count;
    a->ports = ports;
    luaL_setmetatable(L, type);
    return a->value;
}

double *lslua_push_array(lua_State *L, size_t count) { return push(L, LSLUA_ARRAY, count, 1, 1); }
double *lslua_push_complex(lua_State *L, size_t count, int32_t ports) { return push(L, LSLUA_COMPLEX, count, (size_t)ports, 2); }

const double *lslua_numbers(lua_State *L, const lslua_at *at, const char *key, int index, size_t *count)
{
    const array *a = luaL_testudata(L, index, LSLUA_ARRAY);
    double *value;
    size_t i;
    if (a != NULL) {
        *count = a->count;
        return a->value;
    }
    if (!lua_istable(L, index))
        lslua_wrong_type(at, key, "list of numbers or " LSLUA_ARRAY, index);
    index = lua_absindex(L, index);
    luaL_checkstack(L, 4, NULL);
    *count = (size_t)lua_rawlen(L, index);
    value = lslua_scratch(L, *count, sizeof *value);
    for (i = 0; i < *count; i++) {
        if (lua_rawgeti(L, index, (lua_Integer)i + 1) != LUA_TNUMBER)
            lslua_complain(at, key, "item %I: number expected, got %s", (LUAI_UACINT)i + 1, luaL_typename(L, -1));
        value[i] = (double)lua_tonumber(L, -1);
        lua_pop(L, 1);
    }
    return value;
}

const double *lslua_complex(lua_State *L, const lslua_at *at, const char *key, int index, size_t *count, int32_t *ports)
{
    const array *a = luaL_testudata(L, index, LSLUA_COMPLEX);
    if (a == NULL) {
        lslua_wrong_type(at, key, LSLUA_COMPLEX, index);
        return NULL;            /* not reached */
    }
    *count = a->count;
    *ports = (int32_t)a->ports;
    return a->value;
}

static void push_list(lua_State *L, size_t count)
{
    lua_createtable(L, count < (size_t)INT_MAX ? (int)count : INT_MAX, 0);
}

void lslua_push_status(lua_State *L, const int32_t *status, size_t count)
{
    size_t i;
    push_list(L, count);
    for (i = 0; i < count; i++) {
        lua_pushinteger(L, status[i]);
        lua_rawseti(L, -2, (lua_Integer)i + 1);
    }
}

int lslua_array_new(lua_State *L)
{
    lslua_at at = {0};
    size_t count;
    const double *from;
    double *to;
    lslua_most(L, 1);
    if (lua_type(L, 1) == LUA_TNUMBER) {
        lua_Integer n = lslua_whole(L, 1);
        luaL_argcheck(L, n >= 0, 1, "count must be >= 0");
        lslua_push_array(L, (size_t)n);
        return 1;
    }
    luaL_checkany(L, 1);
    at.L = L;
    at.arg = 1;
    from = lslua_numbers(L, &at, NULL, 1, &count);
    to = lslua_push_array(L, count);
    if (count > 0)
        memcpy(to, from, count * sizeof *to);
    return 1;
}

/* complex(numbers, ports): re, im, re, im ..., of matrices row by row. */
int lslua_complex_new(lua_State *L)
{
    lslua_at at = {0};
    size_t count, width = 2;
    lua_Integer ports = 1;
    const double *from;
    double *to;
    luaL_checkany(L, 1);
    if (!lua_isnoneornil(L, 2))
        ports = lslua_whole(L, 2);
    luaL_argcheck(L, ports >= 1 && ports <= LSTUB_PORTS_MAX, 2, "ports must be 1 to 16");
    lslua_most(L, 2);
    width *= (size_t)(ports * ports);
    at.L = L;
    at.arg = 1;
    from = lslua_numbers(L, &at, NULL, 1, &count);
    if (count % width != 0)
        luaL_argerror(L, 1, lua_pushfstring(L, "%I numbers: must be a multiple of %I", (LUAI_UACINT)count, (LUAI_UACINT)width));
    to = lslua_push_complex(L, count / width, (int32_t)ports);
    if (count > 0)
        memcpy(to, from, count * sizeof *to);
    return 1;
}

int lslua_linspace(lua_State *L)
{
    double first, last, step, *value;
    lua_Integer count, i;
    lslua_most(L, 3);
    luaL_checktype(L, 1, LUA_TNUMBER);
    luaL_checktype(L, 2, LUA_TNUMBER);
    first = (double)lua_tonumber(L, 1);
    last = (double)lua_tonumber(L, 2);
    count = lslua_whole(L, 3);
    luaL_argcheck(L, count >= 1, 3, "count must be >= 1");
    value = lslua_push_array(L, (size_t)count);
    step = count > 1 ? (last - first) / (double)(count - 1) : 0.0;
    for (i = 0; i < count; i++)
        value[i] = (double)i * step + first;
    if (count > 1)
        value[count - 1] = last;
    return 1;
}

/* ---- libstub.array ---- */

static int array_length(lua_State *L)
{
    const array *a = luaL_checkudata(L, 1, LSLUA_ARRAY);
    lua_pushinteger(L, (lua_Integer)a->count);
    return 1;
}

/* a[i]: nil beyond the ends, so that ipairs stops; anything but a number is a method. */
static int array_index(lua_State *L)
{
    const array *a = luaL_checkudata(L, 1, LSLUA_ARRAY);
    int whole = 0;
    if (lua_type(L, 2) == LUA_TNUMBER) {
        lua_Integer i = lua_tointegerx(L, 2, &whole);
        if (whole && i >= 1 && (lua_Unsigned)i <= a->count)
            lua_pushnumber(L, a->value[i - 1]);
        else
            lua_pushnil(L);
        return 1;
    }
    lua_settop(L, 2);
    lua_rawget(L, lua_upvalueindex(1));
    return 1;
}

static int array_set(lua_State *L)
{
    array *a = luaL_checkudata(L, 1, LSLUA_ARRAY);
    lua_Integer i = lslua_whole(L, 2);
    if (i < 1 || (lua_Unsigned)i > a->count)
        return luaL_error(L, "index %I: must be 1 to %I", (LUAI_UACINT)i, (LUAI_UACINT)a->count);
    if (lua_type(L, 3) != LUA_TNUMBER)
        return luaL_error(L, "index %I: number expected, got %s", (LUAI_UACINT)i, luaL_typename(L, 3));
    a->value[i - 1] = (double)lua_tonumber(L, 3);
    return 0;
}

static int array_totable(lua_State *L)
{
    const array *a = luaL_checkudata(L, 1, LSLUA_ARRAY);
    size_t i;
    push_list(L, a->count);
    for (i = 0; i < a->count; i++) {
        lua_pushnumber(L, a->value[i]);
        lua_rawseti(L, -2, (lua_Integer)i + 1);
    }
    return 1;
}

static int array_tostring(lua_State *L)
{
    const array *a = luaL_checkudata(L, 1, LSLUA_ARRAY);
    lua_pushfstring(L, "%s: %I numbers", LSLUA_ARRAY, (LUAI_UACINT)a->count);
    return 1;
}

/* ---- libstub.complex ---- */

static double part_re(const double *z) { return z[0]; }
static double part_im(const double *z) { return z[1]; }
static double part_abs(const double *z) { return hypot(z[0], z[1]); }
static double part_arg(const double *z) { return atan2(z[1], z[0]); }
static double part_db(const double *z) { return 20.0 * log10(hypot(z[0], z[1])); }

static size_t pairs_of(const array *a) { return a->count * a->ports * a->ports; }

static size_t index_at(lua_State *L, int arg, size_t count)
{
    lua_Integer i = lslua_whole(L, arg);
    if (i < 1 || (lua_Unsigned)i > count)
        luaL_argerror(L, arg, lua_pushfstring(L, "index %I: must be 1 to %I", (LUAI_UACINT)i, (LUAI_UACINT)count));
    return (size_t)i - 1;
}

/* The pair (k) of a list, or (k, to, from) of matrices. */
static const double *pair_at(lua_State *L, const array *a)
{
    size_t k = index_at(L, 2, a->count), to = 0, from = 0;
    if (a->ports > 1 || !lua_isnoneornil(L, 3)) {
        to = index_at(L, 3, a->ports);
        from = index_at(L, 4, a->ports);
    }
    lslua_most(L, 4);
    return a->value + 2 * ((k * a->ports + to) * a->ports + from);
}

/* One part of a pair, or of all of them as an array. */
static int part(lua_State *L, double (*of)(const double *))
{
    const array *a = luaL_checkudata(L, 1, LSLUA_COMPLEX);
    double *out;
    size_t i;
    if (!lua_isnoneornil(L, 2)) {
        lua_pushnumber(L, of(pair_at(L, a)));
        return 1;
    }
    lslua_most(L, 2);
    out = lslua_push_array(L, pairs_of(a));
    for (i = 0; i < pairs_of(a); i++)
        out[i] = of(a->value + 2 * i);
    return 1;
}

static int complex_re(lua_State *L) { return part(L, part_re); }
static int complex_im(lua_State *L) { return part(L, part_im); }
static int complex_abs(lua_State *L) { return part(L, part_abs); }
static int complex_arg(lua_State *L) { return part(L, part_arg); }
static int complex_db(lua_State *L) { return part(L, part_db); }

static int complex_get(lua_State *L)
{
    const double *z = pair_at(L, luaL_checkudata(L, 1, LSLUA_COMPLEX));
    lua_pushnumber(L, z[0]);
    lua_pushnumber(L, z[1]);
    return 2;
}

/* element(to, from): the list of one element of all matrices. */
static int complex_element(lua_State *L)
{
    const array *a = luaL_checkudata(L, 1, LSLUA_COMPLEX);
    size_t to = index_at(L, 2, a->ports), from = index_at(L, 3, a->ports), k;
    double *out;
    lslua_most(L, 3);
    out = lslua_push_complex(L, a->count, 1);
    for (k = 0; k < a->count; k++)
        memcpy(out + 2 * k, a->value + 2 * ((k * a->ports + to) * a->ports + from), 2 * sizeof *out);
    return 1;
}

static int complex_ports(lua_State *L)
{
    const array *a = luaL_checkudata(L, 1, LSLUA_COMPLEX);
    lua_pushinteger(L, (lua_Integer)a->ports);
    return 1;
}

static int complex_interleaved(lua_State *L)
{
    const array *a = luaL_checkudata(L, 1, LSLUA_COMPLEX);
    double *out = lslua_push_array(L, 2 * pairs_of(a));
    if (a->count > 0)
        memcpy(out, a->value, 2 * pairs_of(a) * sizeof *out);
    return 1;
}

static int complex_length(lua_State *L)
{
    const array *a = luaL_checkudata(L, 1, LSLUA_COMPLEX);
    lua_pushinteger(L, (lua_Integer)a->count);
    return 1;
}

static int complex_tostring(lua_State *L)
{
    const array *a = luaL_checkudata(L, 1, LSLUA_COMPLEX);
    if (a->ports == 1)
        lua_pushfstring(L, "%s: %I values", LSLUA_COMPLEX, (LUAI_UACINT)a->count);
    else
        lua_pushfstring(L, "%s: %I matrices of %d ports", LSLUA_COMPLEX, (LUAI_UACINT)a->count, (int)a->ports);
    return 1;
}

void lslua_open_array(lua_State *L)
{
    static const luaL_Reg array_methods[] = {{"totable", array_totable}, {NULL, NULL}};
    static const luaL_Reg complex_methods[] = {
        {"re", complex_re}, {"im", complex_im}, {"abs", complex_abs}, {"arg", complex_arg}, {"db", complex_db},
        {"get", complex_get}, {"element", complex_element}, {"ports", complex_ports}, {"interleaved", complex_interleaved},
        {NULL, NULL}
    };
    lslua_type(L, LSLUA_COMPLEX, complex_methods, NULL, complex_tostring, complex_length);
    lslua_type(L, LSLUA_ARRAY, array_methods, NULL, array_tostring, array_length);
    luaL_getmetatable(L, LSLUA_ARRAY);
    lua_getfield(L, -1, "__index");
    lua_pushcclosure(L, array_index, 1);
    lua_setfield(L, -2, "__index");
    lua_pushcfunction(L, array_set);
    lua_setfield(L, -2, "__newindex");
    lua_pop(L, 1);
}
