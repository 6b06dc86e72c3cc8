/* libstub.touchstone: a file that has been read; and writing one. */
#include "lslua.h"

#include <stdio.h>
#include <string.h>

static const char *const read_keys[] = {"ports", NULL};

static lstub_touchstone *check_touchstone(lua_State *L)
{
    return lslua_handle(L, 1, 1, LSLUA_TOUCHSTONE);
}

/* { ports = } at argument 2, which may be none. */
static int32_t ports_option(lua_State *L)
{
    int32_t ports = 0;
    lslua_most(L, 2);
    if (!lua_isnoneornil(L, 2)) {
        lslua_at at = lslua_options(L, 2, read_keys);
        lslua_integer(&at, "ports", &ports);
    }
    return ports;
}

/* What a read has made, whose object is on top. */
static int made_one(lua_State *L, lslua_object *object, lstub_touchstone *made, int32_t status, const lstub_error *err)
{
    object->handle = made;
    if (status < 0)
        return lslua_fail(L, status, err);
    lslua_charge(L, object);
    return lslua_done(L, 1, status, err);
}

static int touchstone_load(lua_State *L)
{
    const char *path = lslua_path(L, 1);
    int32_t ports = ports_option(L), status;
    lstub_allocator allocator;
    lstub_touchstone *made = NULL;
    lstub_error err;
    lslua_object *object;
    LSTUB_INIT(err);
    object = lslua_new(L, LSLUA_TOUCHSTONE, 0, &allocator);
    status = lstub_touchstone_load(path, ports, &allocator, &made, &err);
    return made_one(L, object, made, status, &err);
}

static int touchstone_parse(lua_State *L)
{
    size_t bytes;
    const char *text;
    lstub_allocator allocator;
    lstub_touchstone *made = NULL;
    lstub_error err;
    lslua_object *object;
    int32_t ports, status;
    LSTUB_INIT(err);
    luaL_checktype(L, 1, LUA_TSTRING);
    ports = ports_option(L);
    text = lua_tolstring(L, 1, &bytes);
    object = lslua_new(L, LSLUA_TOUCHSTONE, 0, &allocator);
    status = lstub_touchstone_parse(text, bytes, ports, &allocator, &made, &err);
    return made_one(L, object, made, status, &err);
}

/* ---- streams: a file of the io library, or a function ---- */

typedef struct stream {
    lua_State  *L;
    FILE       *file;
    int         function;       /* stack index; the slot behind it holds the piece being read, or an error */
    const char *piece;          /* what is left of it                                                   */
    size_t      left;
    int         failed;         /* the function has raised the error in that slot                       */
} stream;

/* The stream at argument `arg`; a function gets two slots. */
static void open_stream(lua_State *L, int arg, stream *s)
{
    luaL_Stream *file = luaL_testudata(L, arg, LUA_FILEHANDLE);
    memset(s, 0, sizeof *s);
    s->L = L;
    if (file != NULL) {
        luaL_argcheck(L, file->closef != NULL, arg, "closed file");
        s->file = file->f;
        return;
    }
    if (!lua_isfunction(L, arg)) {
        lslua_at at = {0};
        at.L = L;
        at.arg = arg;
        lslua_wrong_type(&at, NULL, "file or function", arg);
    }
    lua_pushvalue(L, arg);
    s->function = lua_gettop(L);
    lua_pushnil(L);
    luaL_checkstack(L, 8, NULL);
}

/*
** Calls `call` with the function and `arguments` values on top of the stack; its result is on top then. No error may pass
** through the library: it is kept, and raised when the library has returned.
*/
static int call_stream(stream *s, lua_CFunction call, int arguments)
{
    lua_pushcfunction(s->L, call);
    lua_insert(s->L, -1 - arguments);
    lua_pushvalue(s->L, s->function);
    lua_insert(s->L, -1 - arguments);
    if (lua_pcall(s->L, arguments + 1, 1, 0) == LUA_OK)
        return 1;
    lua_replace(s->L, s->function + 1);
    s->failed = 1;
    return 0;
}

static int raise_kept(const stream *s)
{
    lua_pushvalue(s->L, s->function + 1);
    return lua_error(s->L);
}

#define CANNOT_READ ((size_t)-1)

/* function, bytes: the next piece, or nil. */
static int pull(lua_State *L)
{
    lua_call(L, 1, 1);
    if (!lua_isnil(L, -1) && lua_type(L, -1) != LUA_TSTRING)
        return luaL_error(L, "the source must return strings, and nil at the end, not a %s", luaL_typename(L, -1));
    return 1;
}

static size_t read_stream(void *user, void *buffer, size_t bytes)
{
    stream *s = user;
    size_t n;
    if (s->file != NULL) {
        n = fread(buffer, 1, bytes, s->file);
        return n == 0 && ferror(s->file) ? CANNOT_READ : n;
    }
    if (s->left == 0) {
        lua_pushinteger(s->L, (lua_Integer)bytes);
        if (!call_stream(s, pull, 1))
            return CANNOT_READ;
        s->piece = lua_tolstring(s->L, -1, &s->left);
        lua_replace(s->L, s->function + 1);
    }
    n = s->left < bytes ? s->left : bytes;
    if (n > 0)
        memcpy(buffer, s->piece, n);
    s->piece = n > 0 ? s->piece + n : NULL;
    s->left -= n;
    return n;
}

/* touchstone_read(source, { ports = }) */
static int touchstone_read(lua_State *L)
{
    stream s;
    int32_t ports, status;
    lstub_source source;
    lstub_allocator allocator;
    lstub_touchstone *made = NULL;
    lstub_error err;
    lslua_object *object;
    LSTUB_INIT(err);
    LSTUB_INIT(source);
    ports = ports_option(L);
    open_stream(L, 1, &s);
    source.read = read_stream;
    source.user = &s;
    object = lslua_new(L, LSLUA_TOUCHSTONE, 0, &allocator);
    status = lstub_touchstone_read(&source, ports, &allocator, &made, &err);
    if (s.failed)
        return raise_kept(&s);
    return made_one(L, object, made, status, &err);
}

/* function, address, count: calls it with these bytes as a string. */
static int hand_over(lua_State *L)
{
    const char *bytes = lua_touserdata(L, 2);
    size_t count = (size_t)lua_tointeger(L, 3);
    lua_settop(L, 1);
    lua_pushlstring(L, bytes, count);
    lua_call(L, 1, 1);
    return 1;
}

static int32_t write_stream(void *user, const void *bytes, size_t count)
{
    stream *s = user;
    int stop;
    if (s->file != NULL)
        return fwrite(bytes, 1, count, s->file) != count;
    lua_pushlightuserdata(s->L, (void *)(uintptr_t)bytes);
    lua_pushinteger(s->L, (lua_Integer)count);
    if (!call_stream(s, hand_over, 2))
        return 1;
    stop = lua_isboolean(s->L, -1) && !lua_toboolean(s->L, -1);
    lua_pop(s->L, 1);
    return stop;
}

/* touchstone_write(data, sink) */
static int touchstone_write(lua_State *L)
{
    stream s;
    lstub_sink sink;
    lstub_touchstone_data data;
    lstub_error err;
    int32_t status;
    LSTUB_INIT(err);
    LSTUB_INIT(sink);
    luaL_checktype(L, 1, LUA_TTABLE);
    lslua_most(L, 2);
    lua_settop(L, 2);
    lslua_read_touchstone_data(L, 1, &data);
    open_stream(L, 2, &s);
    sink.write = write_stream;
    sink.user = &s;
    status = lstub_touchstone_write(&data, &sink, &err);
    if (s.failed)
        return raise_kept(&s);
    if (status < 0)
        return lslua_fail(L, status, &err);
    lua_pushboolean(L, 1);
    return lslua_done(L, 1, status, &err);
}

/* touchstone_save(data, path) */
static int touchstone_save(lua_State *L)
{
    lstub_touchstone_data data;
    lstub_error err;
    const char *path;
    int32_t status;
    LSTUB_INIT(err);
    luaL_checktype(L, 1, LUA_TTABLE);
    path = lslua_path(L, 2);
    lslua_most(L, 2);
    lslua_read_touchstone_data(L, 1, &data);
    status = lstub_touchstone_save(&data, path, &err);
    if (status < 0)
        return lslua_fail(L, status, &err);
    lua_pushboolean(L, 1);
    return lslua_done(L, 1, status, &err);
}

/* ---- methods ---- */

static int touchstone_get(lua_State *L)
{
    check_touchstone(L);
    lslua_most(L, 1);
    return lslua_push_touchstone_data(L, 1);
}

static void destroy(void *handle) { lstub_touchstone_destroy(handle); }
static int touchstone_close(lua_State *L) { return lslua_close(L, LSLUA_TOUCHSTONE, destroy); }

static int touchstone_tostring(lua_State *L)
{
    const lslua_object *object = luaL_checkudata(L, 1, LSLUA_TOUCHSTONE);
    lstub_touchstone_data data;
    LSTUB_INIT(data);
    if (object->handle == NULL || lstub_touchstone_get(object->handle, &data, NULL) < 0)
        lua_pushliteral(L, LSLUA_TOUCHSTONE " (closed)");
    else
        lua_pushfstring(L, "%s: %d %s, %I points", LSLUA_TOUCHSTONE, (int)data.ports, data.ports == 1 ? "port" : "ports",
                        (LUAI_UACINT)data.points);
    return 1;
}

const luaL_Reg lslua_touchstones[] = {
    {"touchstone_load", touchstone_load}, {"touchstone_parse", touchstone_parse}, {"touchstone_read", touchstone_read},
    {"touchstone_write", touchstone_write}, {"touchstone_save", touchstone_save}, {NULL, NULL}
};

void lslua_open_touchstone(lua_State *L)
{
    static const luaL_Reg methods[] = {{"get", touchstone_get}, {NULL, NULL}};
    lslua_type(L, LSLUA_TOUCHSTONE, methods, touchstone_close, touchstone_tostring, NULL);
}
