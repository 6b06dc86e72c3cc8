/* Results and failures on their way to Lua. */
#include "lslua.h"

#include <limits.h>
#include <math.h>
#include <stdarg.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#define COUNTED (-2)    /* index of an error of our own, whose message counts from 1 already */

/* C's constants in messages, as Lua writes them. */
static const char *const translated[][2] = {
    {"side = 1:", "side = 'top':"}, {"side = 2:", "side = 'bottom':"}, {"LSTUB_PAIR_SHARED", "shared = true"},
    {"return_xy", "returns.xy"}, {"return_spans", "returns.spans"}, {"partner_backdrills", "pair.backdrills"},
    {"partner_own = 1", "pair.backdrills"},
    {"LSTUB_PORT_COAX", "'coax'"}, {"mode = 1:", "mode = 'odd':"}, {"mode = 2:", "mode = 'even':"},
    {"LSTUB_NETWORK_G and _H", "'G' and 'H'"}, {"edges[0]", "edges.left"}, {"edges[1]", "edges.right"},
    {"edges[2]", "edges.front"}, {"edges[3]", "edges.back"},
};

/* Whether the first `at` characters of text end with `tail`. */
static int ends_with(const char *text, size_t at, const char *tail)
{
    size_t n = strlen(tail);
    return at >= n && strncmp(text + at - n, tail, n) == 0;
}

/*
** The library counts items, layers and ports from 0, Lua from 1. Its messages write such numbers as "layer 7 'L5'",
** "start_layer = 7 'R5'", "item 7", "connects[7]" or "s[7, 0, 1]"; these become "layer 8 'L5'" and so on, whatever stands
** between quotes stays. Messages about files name lines, counted from 1 already.
*/
static int is_counted(const char *text, size_t at, size_t digits)
{
    static const char *const before[] = {"layer ", "layer = ", "item ", "return via ", "port ", "pair ", "coupon ",
                                         "begins on, ", "["};
    size_t i;
    for (i = 0; i < sizeof before / sizeof before[0]; i++)
        if (ends_with(text, at, before[i]))
            return 1;
    return ends_with(text, at, " = ") && strncmp(text + at + digits, " '", 2) == 0;     /* start_layer = 3 'R2' */
}

/* The length of the constant at the start of `text`, and its translation; 0: none. */
static size_t translate(const char *text, const char **to)
{
    size_t i;
    for (i = 0; i < sizeof translated / sizeof translated[0]; i++)
        if (strncmp(text, translated[i][0], strlen(translated[i][0])) == 0) {
            *to = translated[i][1];
            return strlen(translated[i][0]);
        }
    return 0;
}

static void push_message(lua_State *L, int32_t status, const lstub_error *err)
{
    const char *text = err->message;
    luaL_Buffer b;
    size_t i = 0;
    int quoted = 0, indices = 0;        /* within quotes, within [] */
    if (err->index == COUNTED || status == LSTUB_E_FORMAT || status == LSTUB_E_READ || status == LSTUB_E_WRITE) {
        lua_pushstring(L, text);
        return;
    }
    luaL_buffinit(L, &b);
    while (text[i] != '\0') {
        const char *to = NULL;
        size_t constant = quoted ? 0 : translate(text + i, &to);
        size_t digits = quoted ? 0 : strspn(text + i, "0123456789");
        if (constant > 0) {
            luaL_addstring(&b, to);
            i += constant;
            continue;
        }
        if (digits > 0 && digits < 10 && (indices || is_counted(text, i, digits))) {
            char number[24];
            snprintf(number, sizeof number, "%ld", strtol(text + i, NULL, 10) + 1);
            luaL_addstring(&b, number);
            i += digits;
            continue;
        }
        if (text[i] == '\'' && (quoted || i == 0 || text[i - 1] == ' '))
            quoted = !quoted;
        if (!quoted && (text[i] == '[' || text[i] == ']'))
            indices = text[i] == '[';
        luaL_addchar(&b, text[i]);
        i++;
    }
    luaL_pushresult(&b);
}

int lslua_fail(lua_State *L, int32_t status, const lstub_error *err)
{
    switch (status) {
    case LSTUB_E_MEMORY:
        return luaL_error(L, "not enough memory");
    case LSTUB_E_NULL: case LSTUB_E_SIZE: case LSTUB_E_NEWER:
        return luaL_error(L, "module and library do not fit: %s", err->message);
    default:
        lua_pushnil(L);
        push_message(L, status, err);
        lua_pushinteger(L, status);
        return 3;
    }
}

int lslua_done(lua_State *L, int results, int32_t status, const lstub_error *err)
{
    if (status == LSTUB_OK)
        return results;
    push_message(L, status, err);
    lua_pushinteger(L, status);
    return results + 2;
}

int32_t lslua_refuse(lstub_error *err, int32_t status, const char *format, ...)
{
    va_list args;
    va_start(args, format);
    vsnprintf(err->message, sizeof err->message, format, args);
    va_end(args);
    err->status = status;
    err->index = COUNTED;
    return status;
}

int32_t *lslua_new_status(lua_State *L, size_t count)
{
    int32_t *status = lslua_scratch(L, count, sizeof *status);
    size_t i;
    for (i = 0; i < count; i++)
        status[i] = INT_MIN;
    return status;
}

int lslua_batch_failed(lua_State *L, int32_t status, const int32_t *each, size_t count)
{
    size_t i;
    for (i = 0; i < count; i++)
        if (each[i] == LSTUB_E_MEMORY)
            luaL_error(L, "not enough memory");
    return status < 0 && (count == 0 || each[0] == INT_MIN);
}

int lslua_items(lua_State *L, int results, int32_t status, const int32_t *each, size_t count, const lstub_error *err)
{
    size_t i;
    int any = 0;
    for (i = 0; i < count; i++) {
        any |= each[i] >= 0;
        if (each[i] == LSTUB_E_MEMORY)
            status = LSTUB_E_MEMORY;
    }
    if (status == LSTUB_E_MEMORY || (status < 0 && !any))
        return lslua_fail(L, status, err);
    if (status == LSTUB_OK)
        return results;
    lslua_done(L, results, status, err);
    lslua_push_status(L, each, count);
    return results + 3;
}

void lslua_most(lua_State *L, int most)
{
    if (lua_gettop(L) > most)
        luaL_argerror(L, most + 1, "unexpected argument");
}

void lslua_set_number(lua_State *L, const char *key, double value)
{
    if (isnan(value))
        return;
    lua_pushnumber(L, value);
    lua_setfield(L, -2, key);
}

void lslua_set_integer(lua_State *L, const char *key, int64_t value)
{
    lua_pushinteger(L, (lua_Integer)value);
    lua_setfield(L, -2, key);
}

void lslua_set_boolean(lua_State *L, const char *key, int value)
{
    lua_pushboolean(L, value);
    lua_setfield(L, -2, key);
}

void lslua_set_string(lua_State *L, const char *key, const char *value)
{
    if (value == NULL)
        return;
    lua_pushstring(L, value);
    lua_setfield(L, -2, key);
}

void lslua_set_layer(lua_State *L, const char *key, int names, int32_t layer)
{
    if (layer < 0)
        return;
    names = lua_absindex(L, names);
    lua_rawgeti(L, names, (lua_Integer)layer + 1);
    lua_setfield(L, -2, key);
}
