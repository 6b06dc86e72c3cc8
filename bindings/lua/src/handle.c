/* Memory: scratch in userdata, handles from the allocator of the Lua state, objects that close. */
#include "lslua.h"

#include <limits.h>
#include <string.h>

/* A block starts with its size, which a lua_Alloc wants back when the block is freed. */
typedef union block {
    size_t bytes;
    double d;
    void  *p;
    long double ld;
    long long   ll;
} block;

static void *allocate(void *user, size_t bytes)
{
    lslua_object *object = user;
    void *state, *memory;
    lua_Alloc f = lua_getallocf(object->main, &state);
    block *b;
    if (bytes > (size_t)-1 / 2)
        return NULL;
    bytes += sizeof *b;
    memory = f(state, NULL, 0, bytes);
    if (memory == NULL)
        return NULL;
    b = memory;
    b->bytes = bytes;
    object->bytes += bytes;
    return b + 1;
}

static void release(void *user, void *memory)
{
    lslua_object *object = user;
    void *state;
    lua_Alloc f = lua_getallocf(object->main, &state);
    block *b = memory;
    if (b == NULL)
        return;
    b--;
    object->bytes -= b->bytes;
    f(state, b, b->bytes, 0);
}

/* Memory of calls, which no object stands for. */
typedef struct transient {
    lslua_object    object;
    lstub_allocator allocator;
} transient;

static const char transient_key = 0;    /* only its address counts */

static void set_allocator(lua_State *L, lslua_object *object, lstub_allocator *allocator)
{
    memset(object, 0, sizeof *object);
    lua_rawgeti(L, LUA_REGISTRYINDEX, LUA_RIDX_MAINTHREAD);
    object->main = lua_tothread(L, -1);
    lua_pop(L, 1);
    LSTUB_INIT(*allocator);
    allocator->allocate = allocate;
    allocator->release = release;
    allocator->user = object;
}

const lstub_allocator *lslua_allocator(lua_State *L)
{
    transient *t;
    luaL_checkstack(L, 3, NULL);
    lua_rawgetp(L, LUA_REGISTRYINDEX, &transient_key);
    t = lua_touserdata(L, -1);
    lua_pop(L, 1);
    if (t == NULL) {
        t = lua_newuserdatauv(L, sizeof *t, 0);
        set_allocator(L, &t->object, &t->allocator);
        lua_rawsetp(L, LUA_REGISTRYINDEX, &transient_key);
    }
    return &t->allocator;
}

void *lslua_scratch(lua_State *L, size_t count, size_t size)
{
    void *memory;
    if (count > (size_t)INT_MAX || count > (size_t)-1 / 4 / size)
        luaL_error(L, "not enough memory");
    memory = lua_newuserdatauv(L, count * size, 0);
    memset(memory, 0, count * size);
    return memory;
}

lslua_object *lslua_new(lua_State *L, const char *type, int values, lstub_allocator *allocator)
{
    lslua_object *object = lua_newuserdatauv(L, sizeof *object, values);
    set_allocator(L, object, allocator);
    luaL_setmetatable(L, type);
    return object;
}

void lslua_charge(lua_State *L, const lslua_object *object)
{
    size_t kib = object->bytes / 1024;
    if (kib > 0 && lua_gc(L, LUA_GCISRUNNING))
        lua_gc(L, LUA_GCSTEP, kib < INT_MAX ? (int)kib : INT_MAX);
}

void *lslua_handle(lua_State *L, int index, int arg, const char *type)
{
    const lslua_object *object = luaL_checkudata(L, index, type);
    const char *closed = object->handle == NULL ? type : NULL;
    if (object->owner != NULL && object->owner->handle == NULL)
        closed = LSLUA_BOARD;
    if (closed != NULL) {
        lua_pushfstring(L, "closed %s", closed);
        if (arg > 0)
            luaL_argerror(L, arg, lua_tostring(L, -1));
        lua_error(L);
    }
    return object->handle;
}

int lslua_close(lua_State *L, const char *type, void (*destroy)(void *handle))
{
    lslua_object *object = luaL_checkudata(L, 1, type);
    void *handle = object->handle;
    if (object->busy)
        return luaL_error(L, "%s is in use", type);
    object->handle = NULL;
    if (handle != NULL && object->owner == NULL)
        destroy(handle);
    return 0;
}

void lslua_type(lua_State *L, const char *type, const luaL_Reg *methods, lua_CFunction close, lua_CFunction tostring,
                lua_CFunction length)
{
    luaL_newmetatable(L, type);
    lua_newtable(L);
    luaL_setfuncs(L, methods, 0);
    if (close != NULL) {
        lua_pushcfunction(L, close);
        lua_setfield(L, -2, "close");
    }
    lua_setfield(L, -2, "__index");
    if (close != NULL) {
        lua_pushcfunction(L, close);
        lua_setfield(L, -2, "__gc");
        lua_pushcfunction(L, close);
        lua_setfield(L, -2, "__close");
    }
    lua_pushcfunction(L, tostring);
    lua_setfield(L, -2, "__tostring");
    if (length != NULL) {
        lua_pushcfunction(L, length);
        lua_setfield(L, -2, "__len");
    }
    lua_pop(L, 1);
}
