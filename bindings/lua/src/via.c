/* libstub.via: a frozen description of a via on a stackup; it has no handle, and owns its arrays as user values. */
#include "lslua.h"

#include <stdio.h>
#include <string.h>

enum { VALUE_STACKUP = 1, VALUE_PADS, VALUE_ANTIPADS, VALUE_CLEAR, VALUE_CONNECTS, VALUE_BACKDRILLS, VALUE_RETURNS,
       VALUE_COUNT = 7 };

static const char *const via_keys[] = {
    "start_layer", "end_layer", "drill", "pad", "pad_start", "pad_inner", "pad_end", "antipad", "pads", "antipads",
    "clear", "nonfunctional_pads", "connects", "returns", "pair", "backdrills", "pin", "outside_dk", "lid_distance",
    "hole_dk", NULL
};
static const char *const return_keys[] = {"count", "distance", "drill", "wall", "xy", NULL};
static const char *const pair_keys[] = {"pitch", "shared", NULL};
static const char *const pin_keys[] = {"side", "length", NULL};
static const char *const backdrill_keys[] = {"side", "depth", "diameter", NULL};

static const lslua_word pad_words[] = {{"removed", LSTUB_PADS_REMOVED}, {"kept", LSTUB_PADS_KEPT}, {NULL, 0}};

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

static lslua_via *new_via(lua_State *L, int stackup)
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

/* Scratch that belongs to the via at `via`. */
static void *new_array(lua_State *L, int via, int value, size_t count, size_t size)
{
    void *array = lslua_scratch(L, count, size);
    lua_setiuservalue(L, via, value);
    return array;
}

/* ---- reading the options ---- */

/* What is being read into what. */
typedef struct reading {
    lslua_at     at;
    int          stackup, via;  /* stack indices */
    lstub_via   *to;
    lstub_error *err;
} reading;

static int32_t read_span_end(const reading *r, const char *key, int32_t *layer, int *found)
{
    int32_t status = LSTUB_OK;
    *found = lslua_field(&r->at, key);
    if (*found)
        status = lslua_layer(&r->at, key, r->stackup, lua_gettop(r->at.L), layer, r->err);
    lua_pop(r->at.L, 1);
    return status;
}

/* One end given: the other is the outer copper on its side. */
static int32_t read_span(const reading *r)
{
    lua_State *L = r->at.L;
    int start = 0, end = 0;
    int32_t status = read_span_end(r, "start_layer", &r->to->start_layer, &start);
    if (status == LSTUB_OK)
        status = read_span_end(r, "end_layer", &r->to->end_layer, &end);
    if (status < 0 || start == end)
        return status;
    if (start) {
        const lstub_stackup *stackup = lslua_stackup(L, r->stackup, 0);
        return lstub_stackup_copper(stackup, lstub_stackup_copper_count(stackup) - 1, &r->to->end_layer, r->err);
    }
    return lstub_stackup_copper(lslua_stackup(L, r->stackup, 0), 0, &r->to->start_layer, r->err);
}

static void sort_by_layer(lstub_on_layer *list, size_t count)
{
    size_t i, j;
    for (i = 1; i < count; i++) {
        lstub_on_layer moving = list[i];
        for (j = i; j > 0 && list[j - 1].layer > moving.layer; j--)
            list[j] = list[j - 1];
        list[j] = moving;
    }
}

/* { LAYER = value, ... }, sorted so that the order of a table's keys does not matter. */
static int32_t read_map(const reading *r, const char *key, int value, const lstub_on_layer **list, size_t *count)
{
    lua_State *L = r->at.L;
    lslua_at map;
    lstub_on_layer *to;
    int32_t status = LSTUB_OK;
    if (!lslua_table(&r->at, key, &map))
        return LSTUB_OK;
    for (*count = 0, lua_pushnil(L); lua_next(L, map.table); lua_pop(L, 1))
        ++*count;
    to = new_array(L, r->via, value, *count, sizeof *to);
    *list = to;
    lua_pushnil(L);
    while (lua_next(L, map.table)) {
        if (lua_type(L, -1) != LUA_TNUMBER)
            lslua_wrong_type(&map, luaL_tolstring(L, -2, NULL), "number", -2);
        to->value = (double)lua_tonumber(L, -1);
        status = lslua_layer(&r->at, key, r->stackup, lua_gettop(L) - 1, &to->layer, r->err);
        lua_pop(L, 1);
        if (status < 0)
            break;
        to++;
    }
    lua_settop(L, map.table - 1);
    sort_by_layer((lstub_on_layer *)*list, *count);
    return status;
}

static int32_t read_connects(const reading *r)
{
    lua_State *L = r->at.L;
    lslua_at list;
    int32_t *to, status = LSTUB_OK;
    size_t i, count;
    lslua_need(&r->at, "connects", lslua_table(&r->at, "connects", &list));
    count = (size_t)lua_rawlen(L, list.table);
    to = new_array(L, r->via, VALUE_CONNECTS, count, sizeof *to);
    r->to->connects = to;
    r->to->connect_count = count;
    list.list = "connects";
    list.member = NULL;
    for (i = 0; i < count && status == LSTUB_OK; i++) {
        list.item = (lua_Integer)i + 1;
        lua_rawgeti(L, list.table, list.item);
        status = lslua_layer(&list, NULL, r->stackup, lua_gettop(L), &to[i], r->err);
        lua_pop(L, 1);
    }
    lua_pop(L, 1);
    return status;
}

static void read_backdrills(const reading *r)
{
    lua_State *L = r->at.L;
    lslua_at list;
    lstub_backdrill *to;
    size_t i, count;
    if (!lslua_table(&r->at, "backdrills", &list))
        return;
    count = (size_t)lua_rawlen(L, list.table);
    to = new_array(L, r->via, VALUE_BACKDRILLS, count, sizeof *to);
    r->to->backdrills = to;
    r->to->backdrill_count = count;
    for (i = 0; i < count; i++) {
        lslua_at item = list;
        item.list = "backdrills";
        item.member = NULL;
        item.item = (lua_Integer)i + 1;
        if (lua_rawgeti(L, list.table, item.item) != LUA_TTABLE)
            lslua_wrong_type(&item, NULL, "table", -1);
        item.table = lua_gettop(L);
        lslua_check_keys(&item, backdrill_keys);
        lslua_need(&item, "side", lslua_word_field(&item, "side", lslua_sides, &to[i].side));
        lslua_need(&item, "depth", lslua_number(&item, "depth", &to[i].depth));
        lslua_need(&item, "diameter", lslua_number(&item, "diameter", &to[i].diameter));
        lua_pop(L, 1);
    }
    lua_pop(L, 1);
}

/* { { x, y }, ... } on top of the stack, the places of the return vias. Pops it. */
static void read_places(const reading *r, lslua_at list)
{
    lua_State *L = r->at.L;
    size_t i, count = (size_t)lua_rawlen(L, list.table);
    double *to = new_array(L, r->via, VALUE_RETURNS, count, 2 * sizeof *to);
    r->to->return_xy = to;
    r->to->return_count = (int32_t)count;
    list.list = "returns.xy";
    list.member = NULL;
    for (i = 0; i < count; i++) {
        int k, place;
        list.item = (lua_Integer)i + 1;
        if (lua_rawgeti(L, list.table, list.item) != LUA_TTABLE)
            lslua_wrong_type(&list, NULL, "table", -1);
        place = lua_gettop(L);
        if (lua_rawlen(L, place) != 2)
            lslua_complain(&list, NULL, "{ x, y } expected, got %d items", (int)lua_rawlen(L, place));
        for (k = 0; k < 2; k++) {
            if (lua_rawgeti(L, place, k + 1) != LUA_TNUMBER)
                lslua_wrong_type(&list, k == 0 ? "x" : "y", "number", -1);
            *to++ = (double)lua_tonumber(L, -1);
        }
        lua_settop(L, place - 1);
    }
    lua_pop(L, 1);
}

/* Raises where one of the null-ended keys stands beside `key`, which replaces them. */
static void check_alone(const lslua_at *at, const char *key, const char *const *others)
{
    for (; *others != NULL; others++) {
        if (lslua_field(at, *others))
            lslua_complain(at, key, "not together with %s", *others);
        lua_pop(at->L, 1);
    }
}

static void read_returns(const reading *r)
{
    static const char *const beside_wall[] = {"count", "distance", "drill", "xy", NULL};
    static const char *const beside_xy[] = {"count", "distance", NULL};
    lslua_at at, list;
    lstub_via *to = r->to;
    if (!lslua_table(&r->at, "returns", &at))
        return;
    lslua_check_keys(&at, return_keys);
    to->return_kind = LSTUB_RETURN_VIAS;
    if (lslua_number(&at, "wall", &to->return_distance)) {
        check_alone(&at, "wall", beside_wall);
        to->return_kind = LSTUB_RETURN_WALL;
    } else if (lslua_table(&at, "xy", &list)) {
        check_alone(&at, "xy", beside_xy);
        read_places(r, list);
    } else {
        lslua_need(&at, "count", lslua_integer(&at, "count", &to->return_count));
        lslua_need(&at, "distance", lslua_number(&at, "distance", &to->return_distance));
    }
    lslua_number(&at, "drill", &to->return_drill);
    lua_pop(at.L, 1);
}

static void read_pair_and_pin(const reading *r)
{
    lslua_at at;
    int32_t shared = 0;
    if (lslua_table(&r->at, "pair", &at)) {
        lslua_check_keys(&at, pair_keys);
        lslua_need(&at, "pitch", lslua_number(&at, "pitch", &r->to->pair_pitch));
        lslua_boolean(&at, "shared", &shared);
        r->to->pair_kind = shared ? LSTUB_PAIR_SHARED : LSTUB_PAIR_SEPARATE;
        lua_pop(at.L, 1);
    }
    if (lslua_table(&r->at, "pin", &at)) {
        lslua_check_keys(&at, pin_keys);
        lslua_need(&at, "side", lslua_word_field(&at, "side", lslua_sides, &r->to->pin_side));
        lslua_need(&at, "length", lslua_number(&at, "length", &r->to->pin_length));
        lua_pop(at.L, 1);
    }
}

static int32_t read_via(const reading *r)
{
    lstub_via *to = r->to;
    int32_t status;
    double pad = 0.0;
    lslua_need(&r->at, "drill", lslua_number(&r->at, "drill", &to->drill));
    lslua_number(&r->at, "pad", &pad);
    to->pad_start = to->pad_inner = to->pad_end = pad;
    lslua_number(&r->at, "pad_start", &to->pad_start);
    lslua_number(&r->at, "pad_inner", &to->pad_inner);
    lslua_number(&r->at, "pad_end", &to->pad_end);
    lslua_number(&r->at, "antipad", &to->antipad);
    lslua_number(&r->at, "outside_dk", &to->outside_dk);
    lslua_number(&r->at, "lid_distance", &to->lid_distance);
    lslua_number(&r->at, "hole_dk", &to->hole_dk);
    lslua_word_field(&r->at, "nonfunctional_pads", pad_words, &to->nonfunctional_pads);
    read_returns(r);
    read_pair_and_pin(r);
    read_backdrills(r);
    if ((status = read_span(r)) < 0
        || (status = read_map(r, "pads", VALUE_PADS, &to->pads, &to->pad_count)) < 0
        || (status = read_map(r, "antipads", VALUE_ANTIPADS, &to->antipads, &to->antipad_count)) < 0
        || (status = read_map(r, "clear", VALUE_CLEAR, &to->clear, &to->clear_count)) < 0)
        return status;
    return read_connects(r);
}

int lslua_via_new(lua_State *L)
{
    reading r;
    lstub_error err;
    int32_t status;
    LSTUB_INIT(err);
    lslua_stackup(L, 1, 1);
    r.at = lslua_options(L, 2, via_keys);
    lslua_most(L, 2);
    r.to = &new_via(L, 1)->via;
    r.stackup = 1;
    r.via = lua_gettop(L);
    r.err = &err;
    status = read_via(&r);
    if (status == LSTUB_OK)
        status = lstub_via_check(lslua_stackup(L, 1, 1), r.to, &err);
    if (status < 0)
        return lslua_fail(L, status, &err);
    lua_settop(L, r.via);
    return lslua_done(L, 1, status, &err);
}

static const void *copy_array(lua_State *L, int via, int value, const void *from, size_t count, size_t size)
{
    void *to;
    if (count == 0 || from == NULL)
        return NULL;
    to = new_array(L, via, value, count, size);
    memcpy(to, from, count * size);
    return to;
}

void lslua_push_via(lua_State *L, const lstub_via *via, int stackup)
{
    lslua_via *v = new_via(L, stackup);
    lstub_via *to = &v->via;
    int index = lua_gettop(L);
    *to = *via;
    to->pads = copy_array(L, index, VALUE_PADS, via->pads, via->pad_count, sizeof *via->pads);
    to->antipads = copy_array(L, index, VALUE_ANTIPADS, via->antipads, via->antipad_count, sizeof *via->antipads);
    to->clear = copy_array(L, index, VALUE_CLEAR, via->clear, via->clear_count, sizeof *via->clear);
    to->connects = copy_array(L, index, VALUE_CONNECTS, via->connects, via->connect_count, sizeof *via->connects);
    to->backdrills = copy_array(L, index, VALUE_BACKDRILLS, via->backdrills, via->backdrill_count, sizeof *via->backdrills);
    to->return_xy = copy_array(L, index, VALUE_RETURNS, via->return_xy, (size_t)via->return_count, 2 * sizeof *via->return_xy);
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

static void set_returns(lua_State *L, const lstub_via *via)
{
    if (via->return_kind == LSTUB_RETURN_NONE)
        return;
    lua_newtable(L);
    if (via->return_kind == LSTUB_RETURN_WALL) {
        lslua_set_number(L, "wall", via->return_distance);
    } else if (via->return_xy != NULL) {
        set_places(L, via->return_xy, via->return_count);
    } else {
        lslua_set_integer(L, "count", via->return_count);
        lslua_set_number(L, "distance", via->return_distance);
    }
    set_given(L, "drill", via->return_drill);
    lua_setfield(L, -2, "returns");
}

static void set_pair_and_pin(lua_State *L, const lstub_via *via)
{
    if (via->pair_kind != LSTUB_PAIR_NONE) {
        lua_newtable(L);
        lslua_set_number(L, "pitch", via->pair_pitch);
        lslua_set_boolean(L, "shared", via->pair_kind == LSTUB_PAIR_SHARED);
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
    if (via->backdrill_count == 0)
        return;
    lua_createtable(L, (int)via->backdrill_count, 0);
    for (i = 0; i < via->backdrill_count; i++) {
        lua_newtable(L);
        lslua_set_string(L, "side", lslua_word_of(lslua_sides, via->backdrills[i].side));
        lslua_set_number(L, "depth", via->backdrills[i].depth);
        lslua_set_number(L, "diameter", via->backdrills[i].diameter);
        lua_rawseti(L, -2, (lua_Integer)i + 1);
    }
    lua_setfield(L, -2, "backdrills");
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
    lslua_set_string(L, "nonfunctional_pads", lslua_word_of(pad_words, via->nonfunctional_pads));
    set_map(L, "pads", names, via->pads, via->pad_count);
    set_map(L, "antipads", names, via->antipads, via->antipad_count);
    set_map(L, "clear", names, via->clear, via->clear_count);
    set_returns(L, via);
    set_pair_and_pin(L, via);
    set_given(L, "outside_dk", via->outside_dk);
    set_given(L, "lid_distance", via->lid_distance);
    set_given(L, "hole_dk", via->hole_dk);
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
