/* Option tables: every key known, every value of its type, and messages that say where. */
#include "lslua.h"

#include <stdarg.h>
#include <string.h>

int lslua_complain(const lslua_at *at, const char *key, const char *format, ...)
{
    lua_State *L = at->L;
    const char *dot = "";
    int parts = 1;
    va_list args;
    luaL_checkstack(L, 7, NULL);
    if (at->list != NULL) {
        lua_pushfstring(L, "%s[%I]", at->list, (LUAI_UACINT)at->item);
        dot = ".";
        parts++;
    }
    if (at->within != NULL) {
        lua_pushfstring(L, "%s%s", dot, at->within);
        dot = ".";
        parts++;
    }
    if (at->member != NULL) {
        lua_pushfstring(L, "%s%s", dot, at->member);
        dot = ".";
        parts++;
    }
    if (key != NULL) {
        lua_pushfstring(L, "%s%s", dot, key);
        parts++;
    }
    if (parts > 1) {
        lua_pushliteral(L, ": ");
        parts++;
    }
    va_start(args, format);
    lua_pushvfstring(L, format, args);
    va_end(args);
    lua_concat(L, parts);
    return luaL_argerror(L, at->arg, lua_tostring(L, -1));
}

int lslua_wrong_type(const lslua_at *at, const char *key, const char *expected, int index)
{
    const char *got = luaL_typename(at->L, index);
    if (luaL_getmetafield(at->L, index, "__name") == LUA_TSTRING)
        got = lua_tostring(at->L, -1);
    return lslua_complain(at, key, "%s expected, got %s", expected, got);
}

/* "a, b, c" of a null-ended list, pushed. */
static const char *push_list(lua_State *L, const char *const *words)
{
    luaL_Buffer b;
    size_t i;
    luaL_buffinit(L, &b);
    for (i = 0; words[i] != NULL; i++) {
        if (i > 0)
            luaL_addstring(&b, ", ");
        luaL_addstring(&b, words[i]);
    }
    luaL_pushresult(&b);
    return lua_tostring(L, -1);
}

static int is_one_of(const char *word, const char *const *words)
{
    for (; *words != NULL; words++)
        if (strcmp(word, *words) == 0)
            return 1;
    return 0;
}

void lslua_check_keys(const lslua_at *at, const char *const *keys)
{
    lua_State *L = at->L;
    luaL_checkstack(L, 4, NULL);
    lua_pushnil(L);
    while (lua_next(L, at->table)) {
        lua_pop(L, 1);
        if (lua_type(L, -1) != LUA_TSTRING || !is_one_of(lua_tostring(L, -1), keys)) {
            const char *quote = lua_type(L, -1) == LUA_TSTRING ? "'" : "";
            const char *key = luaL_tolstring(L, -1, NULL);
            const char *allowed = push_list(L, keys);
            lslua_complain(at, NULL, "unknown key %s%s%s; allowed: %s", quote, key, quote, allowed);
        }
    }
}

lslua_at lslua_options(lua_State *L, int arg, const char *const *keys)
{
    lslua_at at = {0};
    luaL_checktype(L, arg, LUA_TTABLE);
    at.L = L;
    at.arg = arg;
    at.table = arg;
    lslua_check_keys(&at, keys);
    return at;
}

int lslua_field(const lslua_at *at, const char *key)
{
    luaL_checkstack(at->L, 4, NULL);
    lua_pushstring(at->L, key);
    lua_rawget(at->L, at->table);
    return !lua_isnil(at->L, -1);
}

void lslua_need(const lslua_at *at, const char *key, int found)
{
    if (!found)
        lslua_complain(at, NULL, "missing key '%s'", key);
}

int lslua_number(const lslua_at *at, const char *key, double *value)
{
    int found = lslua_field(at, key);
    if (found) {
        if (lua_type(at->L, -1) != LUA_TNUMBER)
            lslua_wrong_type(at, key, "number", -1);
        *value = (double)lua_tonumber(at->L, -1);
    }
    lua_pop(at->L, 1);
    return found;
}

int lslua_integer(const lslua_at *at, const char *key, int32_t *value)
{
    int found = lslua_field(at, key), exact = 0;
    if (found) {
        lua_Integer n;
        if (lua_type(at->L, -1) != LUA_TNUMBER)
            lslua_wrong_type(at, key, "integer", -1);
        n = lua_tointegerx(at->L, -1, &exact);
        if (!exact || n < INT32_MIN || n > INT32_MAX)
            lslua_complain(at, key, "integer expected, got %s", luaL_tolstring(at->L, -1, NULL));
        *value = (int32_t)n;
    }
    lua_pop(at->L, 1);
    return found;
}

int lslua_port(const lslua_at *at, const char *key, int32_t ports, int32_t *port, lstub_error *err)
{
    int32_t n = 0;
    int found = lslua_integer(at, key, &n);
    if (found && (n < 1 || n > ports))
        lslua_refuse(err, LSTUB_E_ARGUMENT, "%s = %ld: must be 1 to %ld", key, (long)n, (long)ports);
    else if (found)
        *port = n - 1;
    return found;
}

int lslua_boolean(const lslua_at *at, const char *key, int32_t *value)
{
    int found = lslua_field(at, key);
    if (found) {
        if (!lua_isboolean(at->L, -1))
            lslua_wrong_type(at, key, "boolean", -1);
        *value = lua_toboolean(at->L, -1);
    }
    lua_pop(at->L, 1);
    return found;
}

int32_t lslua_word_at(const lslua_at *at, const char *key, const lslua_word *words, int index)
{
    const char *list[32] = {0};
    const char *word;
    size_t i;
    if (lua_type(at->L, index) != LUA_TSTRING)
        lslua_wrong_type(at, key, "string", index);
    word = lua_tostring(at->L, index);
    for (i = 0; words[i].word != NULL; i++)
        if (strcmp(word, words[i].word) == 0)
            return words[i].value;
    for (i = 0; words[i].word != NULL && i + 1 < sizeof list / sizeof list[0]; i++)
        list[i] = words[i].word;
    return lslua_complain(at, key, "'%s' is not one of: %s", word, push_list(at->L, list));
}

int lslua_word_field(const lslua_at *at, const char *key, const lslua_word *words, int32_t *value)
{
    int found = lslua_field(at, key);
    if (found)
        *value = lslua_word_at(at, key, words, -1);
    lua_pop(at->L, 1);
    return found;
}

const char *lslua_word_of(const lslua_word *words, int32_t value)
{
    for (; words->word != NULL; words++)
        if (words->value == value)
            return words->word;
    return NULL;
}

int lslua_table(const lslua_at *at, const char *key, lslua_at *inner)
{
    if (!lslua_field(at, key)) {
        lua_pop(at->L, 1);
        return 0;
    }
    if (!lua_istable(at->L, -1))
        lslua_wrong_type(at, key, "table", -1);
    *inner = *at;
    inner->table = lua_gettop(at->L);
    inner->within = at->member;
    inner->member = key;
    return 1;
}

const char *lslua_text(const lslua_at *at, const char *key, int index)
{
    size_t length;
    const char *text;
    if (lua_type(at->L, index) != LUA_TSTRING)
        lslua_wrong_type(at, key, "string", index);
    text = lua_tolstring(at->L, index, &length);
    if (strlen(text) != length)
        lslua_complain(at, key, "string contains a zero byte");
    return text;
}

const char *lslua_path(lua_State *L, int arg)
{
    lslua_at at = {0};
    at.L = L;
    at.arg = arg;
    if (lua_type(L, arg) != LUA_TSTRING)
        luaL_checktype(L, arg, LUA_TSTRING);
    return lslua_text(&at, NULL, arg);
}

lua_Integer lslua_whole(lua_State *L, int arg)
{
    luaL_checktype(L, arg, LUA_TNUMBER);
    return luaL_checkinteger(L, arg);
}

int lslua_item(lua_State *L, int arg, const char *what, int64_t count, int64_t *index, lstub_error *err)
{
    lua_Integer n = lslua_whole(L, arg);
    if (n >= 1 && n <= (lua_Integer)count) {
        *index = n - 1;
        return 1;
    }
    if (count == 0)
        lslua_refuse(err, LSTUB_E_NONE, "%s %lld: there is none", what, (long long)n);
    else
        lslua_refuse(err, LSTUB_E_NONE, "%s %lld: must be 1 to %lld", what, (long long)n, (long long)count);
    return 0;
}
