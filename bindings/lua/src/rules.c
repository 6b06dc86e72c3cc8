/* libstub.rules: which net carries which signal, and what the fabricator can do. */
#include "lslua.h"

#include <stdio.h>
#include <string.h>

static lstub_rules *check_rules(lua_State *L)
{
    return lslua_handle(L, 1, 1, LSLUA_RULES);
}

static int new_rules(lua_State *L, const char *path, const char *text, size_t bytes)
{
    lstub_allocator allocator;
    lstub_rules *made = NULL;
    lstub_error err;
    lslua_object *object = lslua_new(L, LSLUA_RULES, 0, &allocator);
    int32_t status;
    LSTUB_INIT(err);
    if (path != NULL)
        status = lstub_rules_load(path, &allocator, &made, &err);
    else
        status = lstub_rules_parse(text, bytes, &allocator, &made, &err);
    object->handle = made;
    if (status < 0)
        return lslua_fail(L, status, &err);
    lslua_charge(L, object);
    return lslua_done(L, 1, status, &err);
}

int lslua_rules_load(lua_State *L)
{
    const char *path = lslua_path(L, 1);
    lslua_most(L, 1);
    return new_rules(L, path, NULL, 0);
}

int lslua_rules_parse(lua_State *L)
{
    size_t bytes;
    const char *text;
    luaL_checktype(L, 1, LUA_TSTRING);
    lslua_most(L, 1);
    text = lua_tolstring(L, 1, &bytes);
    return new_rules(L, NULL, text, bytes);
}

static int rules_signal_count(lua_State *L)
{
    check_rules(L);
    lslua_most(L, 1);
    lua_pushinteger(L, lstub_rules_signal_count(check_rules(L)));
    return 1;
}

/* signal(i): name, signal, criteria */
static int rules_signal(lua_State *L)
{
    lstub_signal signal;
    lstub_criteria criteria;
    lstub_error err;
    const char *name = NULL;
    int64_t index;
    int32_t status;
    LSTUB_INIT(err);
    LSTUB_INIT(signal);
    LSTUB_INIT(criteria);
    check_rules(L);
    lslua_most(L, 2);
    if (!lslua_item(L, 2, "signal", lstub_rules_signal_count(check_rules(L)), &index, &err))
        return lslua_fail(L, err.status, &err);
    status = lstub_rules_signal(check_rules(L), (int32_t)index, &name, &signal, &criteria, &err);
    if (status < 0)
        return lslua_fail(L, status, &err);
    lua_pushstring(L, name);
    lslua_push_signal(L, &signal);
    lslua_push_criteria(L, &criteria);
    return lslua_done(L, 3, status, &err);
}

/* match(net): number of the signal, or nil */
static int rules_match(lua_State *L)
{
    lstub_error err;
    int32_t number = -1, status;
    const char *net;
    LSTUB_INIT(err);
    check_rules(L);
    lslua_most(L, 2);
    net = lslua_path(L, 2);
    status = lstub_rules_match(check_rules(L), net, &number, &err);
    if (status < 0)
        return lslua_fail(L, status, &err);
    if (number < 0)
        lua_pushnil(L);
    else
        lua_pushinteger(L, (lua_Integer)number + 1);
    return lslua_done(L, 1, status, &err);
}

static int rules_capability(lua_State *L)
{
    lstub_capability capability;
    lstub_error err;
    double *depths = NULL;
    int32_t status;
    LSTUB_INIT(err);
    LSTUB_INIT(capability);
    check_rules(L);
    lslua_most(L, 1);
    status = lstub_rules_capability(check_rules(L), &capability, &err);
    if (status < 0)
        return lslua_fail(L, status, &err);
    if (capability.depth_count > 0) {    /* they live with the rules, which a finalizer may close */
        size_t count = capability.depth_count;
        depths = lslua_scratch(L, count, sizeof *depths);
        LSTUB_INIT(capability);
        status = lstub_rules_capability(check_rules(L), &capability, &err);
        if (status < 0)
            return lslua_fail(L, status, &err);
        memcpy(depths, capability.depths, count * sizeof *depths);
        capability.depths = depths;
    }
    lslua_push_capability(L, &capability);
    return lslua_done(L, 1, status, &err);
}

static void destroy(void *handle) { lstub_rules_destroy(handle); }
static int rules_close(lua_State *L) { return lslua_close(L, LSLUA_RULES, destroy); }

static int rules_tostring(lua_State *L)
{
    const lslua_object *object = luaL_checkudata(L, 1, LSLUA_RULES);
    if (object->handle == NULL)
        lua_pushliteral(L, LSLUA_RULES " (closed)");
    else
        lua_pushfstring(L, "%s: %d signals", LSLUA_RULES, (int)lstub_rules_signal_count(object->handle));
    return 1;
}

void lslua_open_rules(lua_State *L)
{
    static const luaL_Reg methods[] = {
        {"signal_count", rules_signal_count}, {"signal", rules_signal}, {"match", rules_match},
        {"capability", rules_capability}, {NULL, NULL}
    };
    lslua_type(L, LSLUA_RULES, methods, rules_close, rules_tostring, NULL);
}
