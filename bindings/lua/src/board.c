/* libstub.board: user value 1 is its stackup. */
#include "lslua.h"

#include <stdio.h>
#include <string.h>

static const char *const load_keys[] = {"rules", "stackup", "progress", NULL};

static const lslua_word hole_kinds[] = {{"via", LSTUB_HOLE_VIA}, {"pin", LSTUB_HOLE_PIN}, {NULL, 0}};
static const lslua_word severities[] = {
    {"note", LSTUB_NOTICE_NOTE}, {"warning", LSTUB_NOTICE_WARNING}, {"refused", LSTUB_NOTICE_REFUSED}, {NULL, 0}
};

static lstub_board *check_board(lua_State *L)
{
    return lslua_handle(L, 1, 1, LSLUA_BOARD);
}

/* ---- loading ---- */

typedef struct progress {
    lua_State *L;
    int function;               /* stack index                                                         */
    int error;                  /* stack index of the error the function raised                        */
    int failed;
} progress;

/* No error may pass through the library: it is kept, and raised when the library has returned. */
static int32_t on_progress(void *user, double fraction)
{
    progress *p = user;
    int stop;
    lua_pushvalue(p->L, p->function);
    lua_pushnumber(p->L, fraction);
    if (lua_pcall(p->L, 1, 1, 0) != LUA_OK) {
        lua_replace(p->L, p->error);
        p->failed = 1;
        return 1;
    }
    stop = lua_isboolean(p->L, -1) && !lua_toboolean(p->L, -1);
    lua_pop(p->L, 1);
    return stop;
}

/* Reads { rules =, stackup =, progress = }, and leaves rules, function and room for an error on the stack. */
static lslua_object *load_options(lua_State *L, lstub_board_options *options, progress *p)
{
    lslua_at at;
    lslua_object *rules = NULL;
    LSTUB_INIT(*options);
    p->L = L;
    p->failed = 0;
    if (lua_isnoneornil(L, 2))
        return NULL;
    at = lslua_options(L, 2, load_keys);
    if (lslua_field(&at, "stackup"))
        options->stackup = lslua_text(&at, "stackup", -1);
    if (lslua_field(&at, "rules")) {
        rules = luaL_testudata(L, -1, LSLUA_RULES);
        if (rules == NULL)
            lslua_wrong_type(&at, "rules", LSLUA_RULES, -1);
        if (rules->handle == NULL)
            lslua_complain(&at, "rules", "closed %s", LSLUA_RULES);
    }
    if (lslua_field(&at, "progress")) {
        if (!lua_isfunction(L, -1))
            lslua_wrong_type(&at, "progress", "function", -1);
        p->function = lua_gettop(L);
        lua_pushnil(L);
        p->error = lua_gettop(L);
        options->progress = on_progress;
        options->progress_user = p;
    }
    return rules;
}

int lslua_board_load(lua_State *L)
{
    const char *path = lslua_path(L, 1);
    lstub_board_options options;
    lstub_allocator allocator;
    lstub_board *made = NULL;
    lstub_error err;
    lslua_object *object, *rules;
    progress p;
    int32_t status;
    LSTUB_INIT(err);
    lslua_most(L, 2);
    rules = load_options(L, &options, &p);
    object = lslua_new(L, LSLUA_BOARD, 1, &allocator);
    luaL_checkstack(L, 8, NULL);
    if (rules != NULL && rules->handle == NULL)
        return luaL_error(L, "closed %s", LSLUA_RULES);
    if (rules != NULL)
        rules->busy++;
    status = lstub_board_load(path, rules == NULL ? NULL : rules->handle, &options, &allocator, &made, &err);
    if (rules != NULL)
        rules->busy--;
    object->handle = made;
    if (p.failed) {
        lua_pushvalue(L, p.error);
        return lua_error(L);
    }
    if (status < 0)
        return lslua_fail(L, status, &err);
    lslua_push_borrowed_stackup(L, lstub_board_stackup(made), -1);
    lua_setiuservalue(L, -2, 1);
    lslua_charge(L, object);
    return lslua_done(L, 1, status, &err);
}

/* ---- what is on it ---- */

static int board_name(lua_State *L)
{
    check_board(L);
    lslua_most(L, 1);
    lua_pushstring(L, lstub_board_name(check_board(L)));
    return 1;
}

static int board_stackup(lua_State *L)
{
    check_board(L);
    lslua_most(L, 1);
    lua_getiuservalue(L, 1, 1);
    return 1;
}

static int board_hole_count(lua_State *L)
{
    check_board(L);
    lslua_most(L, 1);
    lua_pushinteger(L, (lua_Integer)lstub_board_hole_count(check_board(L)));
    return 1;
}

/* The strings of a hole live with the board, so each is asked for when it is pushed. */
static int push_hole(lua_State *L, size_t index)
{
    lstub_hole hole;
    lstub_error err;
    int32_t status;
    int part;
    LSTUB_INIT(err);
    lua_createtable(L, 0, 10);
    for (part = 0; part < 4; part++) {
        LSTUB_INIT(hole);
        status = lstub_board_hole(check_board(L), index, &hole, &err);
        if (status < 0)
            return lslua_fail(L, status, &err);
        switch (part) {
        case 0: lslua_set_string(L, "name", hole.name); break;
        case 1: lslua_set_string(L, "net", hole.net); break;
        case 2: lslua_set_string(L, "padstack", hole.padstack); break;
        default: break;
        }
    }
    lslua_set_string(L, "kind", lslua_word_of(hole_kinds, hole.kind));
    if (hole.signal >= 0)
        lslua_set_integer(L, "signal", (int64_t)hole.signal + 1);
    if (hole.partner >= 0)
        lslua_set_integer(L, "partner", (int64_t)hole.partner + 1);
    lslua_set_integer(L, "status", hole.status);
    lslua_set_number(L, "x", hole.x);
    lslua_set_number(L, "y", hole.y);
    lslua_set_integer(L, "line", hole.line);
    return 1;
}

/* The hole that argument 2 names; 0 and a filled err if there is none. */
static int hole_argument(lua_State *L, int64_t *index, lstub_error *err)
{
    check_board(L);
    lslua_most(L, 2);
    return lslua_item(L, 2, "hole", (int64_t)lstub_board_hole_count(check_board(L)), index, err);
}

static int board_hole(lua_State *L)
{
    lstub_error err;
    int64_t index;
    LSTUB_INIT(err);
    if (!hole_argument(L, &index, &err))
        return lslua_fail(L, err.status, &err);
    return push_hole(L, (size_t)index);
}

static int board_holes(lua_State *L)
{
    size_t i, n = lstub_board_hole_count(check_board(L));
    lslua_most(L, 1);
    lua_createtable(L, (int)n, 0);
    for (i = 0; i < n; i++) {
        int results = push_hole(L, i);
        if (results != 1)
            return results;
        lua_rawseti(L, -2, (lua_Integer)i + 1);
    }
    return 1;
}

/* via(i): a copy, so that it needs no more than the stackup. */
static int board_via(lua_State *L)
{
    lstub_via via;
    lstub_error err;
    int64_t index;
    int32_t status;
    LSTUB_INIT(err);
    LSTUB_INIT(via);
    if (!hole_argument(L, &index, &err))
        return lslua_fail(L, err.status, &err);
    lua_getiuservalue(L, 1, 1);
    status = lstub_board_via(check_board(L), (size_t)index, &via, &err);
    if (status < 0)
        return lslua_fail(L, status, &err);
    lslua_push_via(L, &via, -1);
    return lslua_done(L, 1, status, &err);
}

static int board_notice_count(lua_State *L)
{
    check_board(L);
    lslua_most(L, 1);
    lua_pushinteger(L, (lua_Integer)lstub_board_notice_count(check_board(L)));
    return 1;
}

/* The message lives with the board; it is copied by the first call into Lua after it was asked for. */
static int push_notice(lua_State *L, size_t index)
{
    lstub_notice notice;
    lstub_error err;
    int32_t status;
    LSTUB_INIT(err);
    LSTUB_INIT(notice);
    lua_createtable(L, 0, 4);
    status = lstub_board_notice(check_board(L), index, &notice, &err);
    if (status < 0)
        return lslua_fail(L, status, &err);
    lslua_set_string(L, "message", notice.message);
    lslua_set_string(L, "severity", lslua_word_of(severities, notice.severity));
    lslua_set_integer(L, "line", notice.line);
    lslua_set_integer(L, "count", notice.count);
    return 1;
}

static int board_notice(lua_State *L)
{
    lstub_error err;
    int64_t index;
    LSTUB_INIT(err);
    check_board(L);
    lslua_most(L, 2);
    if (!lslua_item(L, 2, "notice", (int64_t)lstub_board_notice_count(check_board(L)), &index, &err))
        return lslua_fail(L, err.status, &err);
    return push_notice(L, (size_t)index);
}

static int board_notices(lua_State *L)
{
    size_t i, n = lstub_board_notice_count(check_board(L));
    lslua_most(L, 1);
    lua_createtable(L, (int)n, 0);
    for (i = 0; i < n; i++) {
        int results = push_notice(L, i);
        if (results != 1)
            return results;
        lua_rawseti(L, -2, (lua_Integer)i + 1);
    }
    return 1;
}

/* ---- plan, files, summary ---- */

/* plan(rules, capability, options) */
static int board_plan(lua_State *L)
{
    lstub_capability capability;
    lstub_model_options options;
    lstub_allocator allocator;
    lstub_plan *made = NULL;
    lstub_error err;
    lslua_object *object;
    const lstub_rules *rules = NULL;
    int own, given;
    int32_t status;
    LSTUB_INIT(err);
    check_board(L);
    lslua_most(L, 4);
    lua_settop(L, 4);
    given = !lua_isnil(L, 2);
    own = !lua_isnil(L, 3);
    if (given)
        lslua_handle(L, 2, 2, LSLUA_RULES);
    else if (!own)
        luaL_argerror(L, 3, "capability expected where there are no rules");
    lslua_model_argument(L, 4, &options);
    if (own)
        lslua_read_capability(L, 3, &capability);
    object = lslua_new(L, LSLUA_PLAN, 1, &allocator);
    lua_getiuservalue(L, 1, 1);
    lslua_push_names(L, -1);
    lua_setiuservalue(L, -3, 1);
    lua_pop(L, 1);
    if (given)
        rules = lslua_handle(L, 2, 2, LSLUA_RULES);
    status = lstub_board_plan(check_board(L), rules, own ? &capability : NULL, &options, &allocator, &made, &err);
    object->handle = made;
    if (status < 0)
        return lslua_fail(L, status, &err);
    lslua_charge(L, object);
    return lslua_done(L, 1, status, &err);
}

static int write_file(lua_State *L, int32_t (*call)(const lstub_board *, const lstub_plan *, const char *, lstub_error *))
{
    const char *path;
    const lstub_plan *plan;
    lstub_error err;
    int32_t status;
    LSTUB_INIT(err);
    check_board(L);
    plan = lslua_handle(L, 2, 2, LSLUA_PLAN);
    path = lslua_path(L, 3);
    lslua_most(L, 3);
    status = call(check_board(L), plan, path, &err);
    if (status < 0)
        return lslua_fail(L, status, &err);
    lua_pushboolean(L, 1);
    return lslua_done(L, 1, status, &err);
}

static int board_write_plan_csv(lua_State *L) { return write_file(L, lstub_board_write_plan_csv); }
static int board_write_drill_csv(lua_State *L) { return write_file(L, lstub_board_write_drill_csv); }
static int board_write(lua_State *L) { return write_file(L, lstub_board_write); }

static int board_summary(lua_State *L)
{
    char *text;
    size_t bytes = 4096, needed = 0;
    lstub_error err;
    int32_t status;
    LSTUB_INIT(err);
    check_board(L);
    lslua_handle(L, 2, 2, LSLUA_PLAN);
    lslua_most(L, 2);
    for (;;) {
        text = lslua_scratch(L, bytes, 1);
        status = lstub_board_summary(check_board(L), lslua_handle(L, 2, 2, LSLUA_PLAN), text, bytes, &needed, &err);
        if (status != LSTUB_W_CAPACITY)
            break;
        bytes = needed;
        lua_pop(L, 1);
    }
    if (status < 0)
        return lslua_fail(L, status, &err);
    lua_pushstring(L, text);
    return lslua_done(L, 1, status, &err);
}

/* ---- life ---- */

static void destroy(void *handle) { lstub_board_destroy(handle); }
static int board_close(lua_State *L) { return lslua_close(L, LSLUA_BOARD, destroy); }

static int board_tostring(lua_State *L)
{
    const lslua_object *object = luaL_checkudata(L, 1, LSLUA_BOARD);
    if (object->handle == NULL)
        lua_pushliteral(L, LSLUA_BOARD " (closed)");
    else
        lua_pushfstring(L, "%s '%s': %I holes", LSLUA_BOARD, lstub_board_name(object->handle),
                        (LUAI_UACINT)lstub_board_hole_count(object->handle));
    return 1;
}

void lslua_open_board(lua_State *L)
{
    static const luaL_Reg methods[] = {
        {"name", board_name}, {"stackup", board_stackup}, {"hole_count", board_hole_count}, {"hole", board_hole},
        {"holes", board_holes}, {"via", board_via}, {"notice_count", board_notice_count},
        {"notice", board_notice}, {"notices", board_notices}, {"plan", board_plan},
        {"write_plan_csv", board_write_plan_csv}, {"write_drill_csv", board_write_drill_csv}, {"write", board_write},
        {"summary", board_summary}, {NULL, NULL}
    };
    lslua_type(L, LSLUA_BOARD, methods, board_close, board_tostring, NULL);
}
