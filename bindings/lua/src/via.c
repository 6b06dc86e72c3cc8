/* libstub.via: a frozen description of a via on a stackup; it has no handle, and owns its arrays as user values. */
#include "via.h"

#include <stdio.h>
#include <string.h>

const lslua_word lslua_pad_words[] = {{"removed", LSTUB_PADS_REMOVED}, {"kept", LSTUB_PADS_KEPT}, {NULL, 0}};
const char *const lslua_edge_sides[4] = {"left", "right", "front", "back"};

lslua_via *lslua_check_via(lua_State *L, int index)
{
    lslua_via *v = luaL_checkudata(L, index, LSLUA_VIA);
    if (v->closed)
        luaL_argerror(L, index, "closed " LSLUA_VIA);
    return v;
}

/* The stackup of the via at `index`, pushed. */
static const lstub_stackup *push_stackup(lua_State *L, int index)
{
    lua_getiuservalue(L, index, VALUE_STACKUP);
    return lslua_stackup(L, -1, 0);
}

lslua_via *lslua_push_new_via(lua_State *L, int stackup)
{
    lslua_via *v;
    stackup = lua_absindex(L, stackup);
    v = lua_newuserdatauv(L, sizeof *v, VALUE_COUNT);
    LSTUB_INIT(v->via);
    v->closed = 0;
    luaL_setmetatable(L, LSLUA_VIA);
    lua_pushvalue(L, stackup);
    lua_setiuservalue(L, -2, VALUE_STACKUP);
    return v;
}

void *lslua_via_array(lua_State *L, int via, int value, size_t count, size_t size)
{
    void *array = lslua_scratch(L, count, size);
    lua_setiuservalue(L, via, value);
    return array;
}

static const void *copy_array(lua_State *L, int via, int value, const void *from, size_t count, size_t size)
{
    void *to;
    if (count == 0 || from == NULL)
        return NULL;
    to = lslua_via_array(L, via, value, count, size);
    memcpy(to, from, count * size);
    return to;
}

void lslua_push_via(lua_State *L, const lstub_via *via, int stackup)
{
    lslua_via *v = lslua_push_new_via(L, stackup);
    lstub_via *to = &v->via;
    int index = lua_gettop(L);
    *to = *via;
    to->pads = copy_array(L, index, VALUE_PADS, via->pads, via->pad_count, sizeof *via->pads);
    to->antipads = copy_array(L, index, VALUE_ANTIPADS, via->antipads, via->antipad_count, sizeof *via->antipads);
    to->clear = copy_array(L, index, VALUE_CLEAR, via->clear, via->clear_count, sizeof *via->clear);
    to->connects = copy_array(L, index, VALUE_CONNECTS, via->connects, via->connect_count, sizeof *via->connects);
    to->backdrills = copy_array(L, index, VALUE_BACKDRILLS, via->backdrills, via->backdrill_count, sizeof *via->backdrills);
    to->return_xy = copy_array(L, index, VALUE_RETURNS, via->return_xy, (size_t)via->return_count, 2 * sizeof *via->return_xy);
    to->return_spans = copy_array(L, index, VALUE_SPANS, via->return_spans, (size_t)via->return_count,
                                  2 * sizeof *via->return_spans);
    to->partner_backdrills = copy_array(L, index, VALUE_PARTNER, via->partner_backdrills, via->partner_backdrill_count,
                                        sizeof *via->partner_backdrills);
}

lstub_via *lslua_vias(lua_State *L, int arg, int stackup, size_t *count)
{
    lstub_via *vias;
    size_t i;
    luaL_checktype(L, arg, LUA_TTABLE);
    *count = (size_t)lua_rawlen(L, arg);
    vias = lslua_scratch(L, *count, sizeof *vias);
    lua_createtable(L, 0, 0);
    for (i = 0; i < *count; i++) {
        const lslua_via *v;
        lslua_at at = {0};
        at.L = L;
        at.arg = arg;
        at.list = "vias";
        at.item = (lua_Integer)i + 1;
        lua_rawgeti(L, arg, at.item);
        v = luaL_testudata(L, -1, LSLUA_VIA);
        if (v == NULL)
            lslua_wrong_type(&at, NULL, LSLUA_VIA, -1);
        if (v->closed)
            lslua_complain(&at, NULL, "closed %s", LSLUA_VIA);
        lua_getiuservalue(L, -1, VALUE_STACKUP);
        if (!lua_rawequal(L, -1, stackup))
            lslua_complain(&at, NULL, "made on another stackup");
        lua_pop(L, 1);
        vias[i] = v->via;
        lua_rawseti(L, -2, at.item);
    }
    return vias;
}

/* ---- methods ---- */

void lslua_push_stub(lua_State *L, const lstub_stub *stub, int names)
{
    names = lua_absindex(L, names);
    lua_createtable(L, 0, 10);
    lslua_set_string(L, "side", lslua_word_of(lslua_sides, stub->side));
    lslua_set_layer(L, "exit_layer", names, stub->exit_layer);
    lslua_set_layer(L, "end_layer", names, stub->end_layer);
    lslua_set_number(L, "top", stub->top);
    lslua_set_number(L, "bottom", stub->bottom);
    lslua_set_number(L, "length", stub->length);
    lslua_set_number(L, "length_min", stub->length_min);
    lslua_set_number(L, "length_max", stub->length_max);
    lslua_set_number(L, "length_rss_min", stub->length_rss_min);
    lslua_set_number(L, "length_rss_max", stub->length_rss_max);
}

static int via_stubs(lua_State *L)
{
    const lslua_via *v = lslua_check_via(L, 1);
    lstub_stub stubs[2];
    lstub_error err;
    int32_t status, i, count = 0;
    LSTUB_INIT(err);
    LSTUB_INIT(stubs[0]);
    LSTUB_INIT(stubs[1]);
    lslua_most(L, 1);
    status = lstub_via_stubs(push_stackup(L, 1), &v->via, stubs, sizeof stubs[0], &count, &err);
    if (status < 0)
        return lslua_fail(L, status, &err);
    lslua_push_names(L, -1);
    lua_createtable(L, count, 0);
    for (i = 0; i < count; i++) {
        lslua_push_stub(L, &stubs[i], -2);
        lua_rawseti(L, -2, (lua_Integer)i + 1);
    }
    return lslua_done(L, 1, status, &err);
}

static int via_check(lua_State *L)
{
    const lslua_via *v = lslua_check_via(L, 1);
    lstub_error err;
    int32_t status;
    LSTUB_INIT(err);
    lslua_most(L, 1);
    status = lstub_via_check(push_stackup(L, 1), &v->via, &err);
    if (status < 0)
        return lslua_fail(L, status, &err);
    lua_pushboolean(L, 1);
    return lslua_done(L, 1, status, &err);
}

static int via_stackup(lua_State *L)
{
    lslua_check_via(L, 1);
    lslua_most(L, 1);
    lua_getiuservalue(L, 1, VALUE_STACKUP);
    return 1;
}

static int via_close(lua_State *L)
{
    lslua_via *v = luaL_checkudata(L, 1, LSLUA_VIA);
    v->closed = 1;
    return 0;
}

static int via_tostring(lua_State *L)
{
    const lslua_via *v = luaL_checkudata(L, 1, LSLUA_VIA);
    luaL_Buffer b;
    size_t i;
    int names;
    char text[64];
    if (v->closed) {
        lua_pushliteral(L, LSLUA_VIA " (closed)");
        return 1;
    }
    lua_getiuservalue(L, 1, VALUE_STACKUP);
    lslua_push_names(L, -1);
    names = lua_gettop(L);
    snprintf(text, sizeof text, "%s: drill %.4g mm, connects", LSLUA_VIA, v->via.drill * 1e3);
    luaL_buffinit(L, &b);
    luaL_addstring(&b, text);
    for (i = 0; i < v->via.connect_count; i++) {
        luaL_addstring(&b, i == 0 ? " " : ", ");
        lua_rawgeti(L, names, (lua_Integer)v->via.connects[i] + 1);
        luaL_addvalue(&b);
    }
    luaL_pushresult(&b);
    return 1;
}

/* ---- options(): the table that makes this via ---- */

static void set_map(lua_State *L, const char *key, int names, const lstub_on_layer *list, size_t count)
{
    size_t i;
    if (count == 0)
        return;
    lua_createtable(L, 0, (int)count);
    for (i = 0; i < count; i++) {
        lua_rawgeti(L, names, (lua_Integer)list[i].layer + 1);
        lua_pushnumber(L, list[i].value);
        lua_rawset(L, -3);
    }
    lua_setfield(L, -2, key);
}

/* Members that are 0 where nothing was said. */
static void set_given(lua_State *L, const char *key, double value)
{
    if (value != 0.0)
        lslua_set_number(L, key, value);
}

static void set_places(lua_State *L, const double *xy, int32_t count)
{
    int32_t i;
    lua_createtable(L, count, 0);
    for (i = 0; i < count; i++) {
        lua_createtable(L, 2, 0);
        lua_pushnumber(L, xy[2 * i]);
        lua_rawseti(L, -2, 1);
        lua_pushnumber(L, xy[2 * i + 1]);
        lua_rawseti(L, -2, 2);
        lua_rawseti(L, -2, (lua_Integer)i + 1);
    }
    lua_setfield(L, -2, "xy");
}

static void set_spans(lua_State *L, const int32_t *spans, int32_t count, int names)
{
    int32_t i, k;
    lua_createtable(L, count, 0);
    for (i = 0; i < count; i++) {
        lua_createtable(L, 2, 0);
        for (k = 0; k < 2; k++) {
            lua_rawgeti(L, names, (lua_Integer)spans[2 * i + k] + 1);
            lua_rawseti(L, -2, k + 1);
        }
        lua_rawseti(L, -2, (lua_Integer)i + 1);
    }
    lua_setfield(L, -2, "spans");
}

static void set_edges(lua_State *L, const lstub_via *via)
{
    int i;
    if (via->edges[0] == 0.0)
        return;
    lua_createtable(L, 0, 5);
    for (i = 0; i < 4; i++)
        lslua_set_number(L, lslua_edge_sides[i], via->edges[i]);
    lslua_set_boolean(L, "shorted", via->edge_kind == LSTUB_EDGE_SHORTED);
    lua_setfield(L, -2, "edges");
}

static void set_returns(lua_State *L, const lstub_via *via, int names)
{
    if (via->return_kind == LSTUB_RETURN_NONE)
        return;
    lua_newtable(L);
    if (via->return_kind == LSTUB_RETURN_WALL) {
        lslua_set_number(L, "wall", via->return_distance);
    } else if (via->return_xy != NULL) {
        set_places(L, via->return_xy, via->return_count);
        if (via->return_spans != NULL)
            set_spans(L, via->return_spans, via->return_count, names);
    } else {
        lslua_set_integer(L, "count", via->return_count);
        lslua_set_number(L, "distance", via->return_distance);
    }
    set_given(L, "drill", via->return_drill);
    lua_setfield(L, -2, "returns");
}

static void set_backdrills(lua_State *L, const lstub_backdrill *drills, size_t count)
{
    size_t i;
    lua_createtable(L, (int)count, 0);
    for (i = 0; i < count; i++) {
        lua_newtable(L);
        lslua_set_string(L, "side", lslua_word_of(lslua_sides, drills[i].side));
        lslua_set_number(L, "depth", drills[i].depth);
        lslua_set_number(L, "diameter", drills[i].diameter);
        lua_rawseti(L, -2, (lua_Integer)i + 1);
    }
    lua_setfield(L, -2, "backdrills");
}

static void set_pair_and_pin(lua_State *L, const lstub_via *via)
{
    if (via->pair_kind != LSTUB_PAIR_NONE) {
        lua_newtable(L);
        lslua_set_number(L, "pitch", via->pair_pitch);
        lslua_set_boolean(L, "shared", via->pair_kind == LSTUB_PAIR_SHARED);
        if (via->partner_own)
            set_backdrills(L, via->partner_backdrills, via->partner_backdrill_count);
        lua_setfield(L, -2, "pair");
    }
    if (via->pin_side != 0) {
        lua_newtable(L);
        lslua_set_string(L, "side", lslua_word_of(lslua_sides, via->pin_side));
        lslua_set_number(L, "length", via->pin_length);
        lua_setfield(L, -2, "pin");
    }
}

static void set_lists(lua_State *L, const lstub_via *via, int names)
{
    size_t i;
    lua_createtable(L, (int)via->connect_count, 0);
    for (i = 0; i < via->connect_count; i++) {
        lua_rawgeti(L, names, (lua_Integer)via->connects[i] + 1);
        lua_rawseti(L, -2, (lua_Integer)i + 1);
    }
    lua_setfield(L, -2, "connects");
    if (via->backdrill_count > 0)
        set_backdrills(L, via->backdrills, via->backdrill_count);
}

static int via_options(lua_State *L)
{
    const lstub_via *via = &lslua_check_via(L, 1)->via;
    int names;
    lslua_most(L, 1);
    lua_getiuservalue(L, 1, VALUE_STACKUP);
    lslua_push_names(L, -1);
    names = lua_gettop(L);
    lua_newtable(L);
    if (via->start_layer != 0 || via->end_layer != 0) {
        lslua_set_layer(L, "start_layer", names, via->start_layer);
        lslua_set_layer(L, "end_layer", names, via->end_layer);
    }
    lslua_set_number(L, "drill", via->drill);
    lslua_set_number(L, "pad_start", via->pad_start);
    lslua_set_number(L, "pad_inner", via->pad_inner);
    lslua_set_number(L, "pad_end", via->pad_end);
    lslua_set_number(L, "antipad", via->antipad);
    lslua_set_string(L, "nonfunctional_pads", lslua_word_of(lslua_pad_words, via->nonfunctional_pads));
    set_map(L, "pads", names, via->pads, via->pad_count);
    set_map(L, "antipads", names, via->antipads, via->antipad_count);
    set_map(L, "clear", names, via->clear, via->clear_count);
    set_returns(L, via, names);
    set_pair_and_pin(L, via);
    set_given(L, "outside_dk", via->outside_dk);
    set_given(L, "lid_distance", via->lid_distance);
    set_given(L, "hole_dk", via->hole_dk);
    set_edges(L, via);
    set_lists(L, via, names);
    return 1;
}

void lslua_open_via(lua_State *L)
{
    static const luaL_Reg methods[] = {
        {"check", via_check}, {"stubs", via_stubs}, {"model", lslua_via_model}, {"stackup", via_stackup},
        {"options", via_options}, {NULL, NULL}
    };
    lslua_type(L, LSLUA_VIA, methods, via_close, via_tostring, NULL);
}
