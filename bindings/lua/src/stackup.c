/* libstub.stackup: user value 1 is the list of its layer names, 2 the board it is borrowed from. */
#include "lslua.h"

#include <stdio.h>

static const lslua_word kinds[] = {
    {"dielectric", LSTUB_LAYER_DIELECTRIC}, {"signal", LSTUB_LAYER_SIGNAL}, {"plane", LSTUB_LAYER_PLANE},
    {"mixed", LSTUB_LAYER_MIXED}, {NULL, 0}
};

const lslua_word lslua_sides[] = {
    {"top", LSTUB_SIDE_TOP}, {"bottom", LSTUB_SIDE_BOTTOM}, {NULL, 0}
};

const lslua_word lslua_all_sides[] = {
    {"top", LSTUB_SIDE_TOP}, {"bottom", LSTUB_SIDE_BOTTOM}, {"both", LSTUB_SIDE_BOTH}, {NULL, 0}
};

static const char *const layer_keys[] = {
    "name", "kind", "thickness", "tol_plus", "tol_minus", "dk", "in_plane_ratio", "loss_tangent", "f_ref",
    "conductivity", "roughness", "roughness_law", NULL
};

const lstub_stackup *lslua_stackup(lua_State *L, int index, int arg)
{
    return lslua_handle(L, index, arg, LSLUA_STACKUP);
}

void lslua_push_names(lua_State *L, int index)
{
    lua_getiuservalue(L, index, 1);
}

/* ---- making one ---- */

static void read_layer(const lslua_at *at, lstub_layer *layer, lstub_dielectric *dielectric, lstub_conductor *conductor)
{
    int resin, metal;
    LSTUB_INIT(*layer);
    LSTUB_INIT(*dielectric);
    lslua_check_keys(at, layer_keys);
    lslua_need(at, "name", lslua_field(at, "name"));
    layer->name = lslua_text(at, "name", -1);    /* stays alive in its table */
    lua_pop(at->L, 1);
    lslua_need(at, "kind", lslua_word_field(at, "kind", kinds, &layer->kind));
    lslua_need(at, "thickness", lslua_number(at, "thickness", &layer->thickness));
    lslua_number(at, "tol_plus", &layer->tol_plus);
    lslua_number(at, "tol_minus", &layer->tol_minus);
    resin = lslua_number(at, "dk", &dielectric->dk);
    if (layer->kind == LSTUB_LAYER_DIELECTRIC)
        lslua_need(at, "dk", resin);
    if ((lslua_number(at, "in_plane_ratio", &dielectric->in_plane_ratio)
         | lslua_number(at, "loss_tangent", &dielectric->loss_tangent)
         | lslua_number(at, "f_ref", &dielectric->f_ref)) != 0)
        lslua_need(at, "dk", resin);
    metal = lslua_read_conductor(at, conductor);
    layer->dielectric = resin ? dielectric : NULL;
    layer->conductor = metal ? conductor : NULL;
}

lslua_object *lslua_push_stackup(lua_State *L, lstub_allocator *allocator)
{
    lslua_object *object = lslua_new(L, LSLUA_STACKUP, 2, allocator);
    lua_newtable(L);
    lua_setiuservalue(L, -2, 1);
    return object;
}

void lslua_fill_names(lua_State *L)
{
    int32_t i, n = lstub_stackup_count(lslua_stackup(L, -1, 0));
    lua_getiuservalue(L, -1, 1);
    for (i = 0; i < n; i++) {
        lstub_layer layer;
        LSTUB_INIT(layer);
        if (lstub_stackup_layer(lslua_stackup(L, -2, 0), i, &layer, NULL) < 0)
            luaL_error(L, "module and library do not fit: layer %d of %d", (int)i, (int)n);
        lua_pushstring(L, layer.name);
        lua_rawseti(L, -2, (lua_Integer)i + 1);
    }
    lua_pop(L, 1);
}

int lslua_stackup_new(lua_State *L)
{
    lslua_at at = {0};
    lstub_layer *layers;
    lstub_dielectric *dielectrics;
    lstub_conductor *conductors;
    lstub_allocator allocator;
    lstub_stackup *made = NULL;
    lstub_error err;
    lslua_object *object;
    size_t count, i;
    int32_t status;
    LSTUB_INIT(err);
    luaL_checktype(L, 1, LUA_TTABLE);
    lslua_most(L, 1);
    count = (size_t)lua_rawlen(L, 1);
    layers = lslua_scratch(L, count, sizeof *layers);
    dielectrics = lslua_scratch(L, count, sizeof *dielectrics);
    conductors = lslua_scratch(L, count, sizeof *conductors);
    at.L = L;
    at.arg = 1;
    at.list = "layers";
    for (i = 0; i < count; i++) {
        at.item = (lua_Integer)i + 1;
        if (lua_rawgeti(L, 1, at.item) != LUA_TTABLE)
            lslua_wrong_type(&at, NULL, "table", -1);
        at.table = lua_gettop(L);
        read_layer(&at, &layers[i], &dielectrics[i], &conductors[i]);
        lua_pop(L, 1);
    }
    object = lslua_push_stackup(L, &allocator);
    status = lstub_stackup_create(layers, count, sizeof *layers, &allocator, &made, &err);
    object->handle = made;
    if (status < 0)
        return lslua_fail(L, status, &err);
    lslua_fill_names(L);
    lslua_charge(L, object);
    return lslua_done(L, 1, status, &err);
}

void lslua_push_borrowed_stackup(lua_State *L, const lstub_stackup *stackup, int owner)
{
    lstub_allocator unused;
    lslua_object *object;
    owner = lua_absindex(L, owner);
    object = lslua_push_stackup(L, &unused);
    object->handle = (void *)stackup;
    object->owner = lua_touserdata(L, owner);
    lua_pushvalue(L, owner);
    lua_setiuservalue(L, -2, 2);
    lslua_fill_names(L);
}

/* ---- layers by name or number ---- */

int32_t lslua_layer(const lslua_at *at, const char *key, int stackup, int value, int32_t *layer, lstub_error *err)
{
    lua_State *L = at->L;
    char where[80] = "";
    int exact = 0;
    if (at->list != NULL)
        snprintf(where, sizeof where, "%.40s[%lld]: ", at->list, (long long)at->item);
    else if (key != NULL)
        snprintf(where, sizeof where, "%.40s: ", key);
    if (lua_type(L, value) == LUA_TSTRING) {
        const char *name = lslua_text(at, key, value);
        if (lstub_stackup_find(lslua_stackup(L, stackup, 0), name, layer, NULL) == LSTUB_OK)
            return LSTUB_OK;
        return lslua_refuse(err, LSTUB_E_NONE, "%sthere is no layer '%.100s'", where, name);
    }
    if (lua_type(L, value) != LUA_TNUMBER)
        lslua_wrong_type(at, key, "name or number of a layer", value);
    {
        lua_Integer n = lua_tointegerx(L, value, &exact);
        int32_t count = lstub_stackup_count(lslua_stackup(L, stackup, 0));
        if (!exact)
            lslua_complain(at, key, "integer expected, got %s", luaL_tolstring(L, value, NULL));
        if (n < 1 || n > count)
            return lslua_refuse(err, LSTUB_E_NONE, "%slayer %lld: must be 1 to %ld", where, (long long)n, (long)count);
        *layer = (int32_t)(n - 1);
    }
    return LSTUB_OK;
}

/* The layer that argument `arg` names. */
static int32_t layer_argument(lua_State *L, int arg, int32_t *layer, lstub_error *err)
{
    lslua_at at = {0};
    at.L = L;
    at.arg = arg;
    luaL_checkany(L, arg);
    return lslua_layer(&at, NULL, 1, arg, layer, err);
}

/* ---- methods ---- */

static int stackup_count(lua_State *L)
{
    lua_pushinteger(L, lstub_stackup_count(lslua_stackup(L, 1, 1)));
    return 1;
}

static int stackup_copper_count(lua_State *L)
{
    lslua_stackup(L, 1, 1);
    lslua_most(L, 1);
    lua_pushinteger(L, lstub_stackup_copper_count(lslua_stackup(L, 1, 1)));
    return 1;
}

static void push_layer(lua_State *L, const lstub_layer *layer)
{
    lua_createtable(L, 0, 12);
    lslua_set_string(L, "name", layer->name);
    lslua_set_string(L, "kind", lslua_word_of(kinds, layer->kind));
    lslua_set_number(L, "thickness", layer->thickness);
    lslua_set_number(L, "tol_plus", layer->tol_plus);
    lslua_set_number(L, "tol_minus", layer->tol_minus);
    if (layer->dielectric != NULL) {
        lslua_set_number(L, "dk", layer->dielectric->dk);
        lslua_set_number(L, "in_plane_ratio", layer->dielectric->in_plane_ratio);
        lslua_set_number(L, "loss_tangent", layer->dielectric->loss_tangent);
        lslua_set_number(L, "f_ref", layer->dielectric->f_ref);
    }
    if (layer->conductor != NULL) {
        lslua_set_number(L, "conductivity", layer->conductor->conductivity);
        lslua_set_number(L, "roughness", layer->conductor->roughness);
        lslua_set_string(L, "roughness_law", lslua_word_of(lslua_roughness_laws, layer->conductor->roughness_law));
    }
}

/* Copies what a layer points to, so that a table can be made of it while finalizers run. */
static int32_t get_layer(lua_State *L, int32_t index, lstub_layer *layer, lstub_dielectric *dielectric,
                         lstub_conductor *conductor, char *name, size_t bytes, lstub_error *err)
{
    int32_t status;
    LSTUB_INIT(*layer);
    status = lstub_stackup_layer(lslua_stackup(L, 1, 1), index, layer, err);
    if (status < 0)
        return status;
    snprintf(name, bytes, "%s", layer->name);
    layer->name = name;
    if (layer->dielectric != NULL) {
        *dielectric = *layer->dielectric;
        layer->dielectric = dielectric;
    }
    if (layer->conductor != NULL) {
        *conductor = *layer->conductor;
        layer->conductor = conductor;
    }
    return status;
}

static int push_layer_at(lua_State *L, int32_t index, lstub_error *err)
{
    lstub_layer layer;
    lstub_dielectric dielectric;
    lstub_conductor conductor;
    char name[LSTUB_NAME_MAX + 1];
    int32_t status = get_layer(L, index, &layer, &dielectric, &conductor, name, sizeof name, err);
    if (status < 0)
        return lslua_fail(L, status, err);
    push_layer(L, &layer);
    return 1;
}

static int stackup_layer(lua_State *L)
{
    lstub_error err;
    int32_t index, status;
    LSTUB_INIT(err);
    lslua_stackup(L, 1, 1);
    lslua_most(L, 2);
    status = layer_argument(L, 2, &index, &err);
    return status < 0 ? lslua_fail(L, status, &err) : push_layer_at(L, index, &err);
}

static int stackup_layers(lua_State *L)
{
    int32_t i, n = lstub_stackup_count(lslua_stackup(L, 1, 1));
    lstub_error err;
    LSTUB_INIT(err);
    lslua_most(L, 1);
    lua_createtable(L, n, 0);
    for (i = 0; i < n; i++) {
        int results = push_layer_at(L, i, &err);
        if (results != 1)
            return results;
        lua_rawseti(L, -2, (lua_Integer)i + 1);
    }
    return 1;
}

static int stackup_find(lua_State *L)
{
    lslua_at at = {0};
    lstub_error err;
    int32_t index, status;
    LSTUB_INIT(err);
    lslua_stackup(L, 1, 1);
    lslua_most(L, 2);
    luaL_checktype(L, 2, LUA_TSTRING);
    at.L = L;
    at.arg = 2;
    status = lslua_layer(&at, NULL, 1, 2, &index, &err);
    if (status < 0)
        return lslua_fail(L, status, &err);
    lua_pushinteger(L, (lua_Integer)index + 1);
    return 1;
}

static int stackup_copper(lua_State *L)
{
    lstub_error err;
    int32_t index, status;
    int64_t number;
    LSTUB_INIT(err);
    lslua_stackup(L, 1, 1);
    lslua_most(L, 2);
    if (!lslua_item(L, 2, "copper layer", lstub_stackup_copper_count(lslua_stackup(L, 1, 1)), &number, &err))
        return lslua_fail(L, err.status, &err);
    status = lstub_stackup_copper(lslua_stackup(L, 1, 1), (int32_t)number, &index, &err);
    if (status < 0)
        return lslua_fail(L, status, &err);
    lua_pushinteger(L, (lua_Integer)index + 1);
    return 1;
}

static int stackup_depth(lua_State *L)
{
    lstub_error err;
    double top, bottom;
    int32_t index, status;
    LSTUB_INIT(err);
    lslua_stackup(L, 1, 1);
    lslua_most(L, 2);
    status = layer_argument(L, 2, &index, &err);
    if (status == LSTUB_OK)
        status = lstub_stackup_depth(lslua_stackup(L, 1, 1), index, &top, &bottom, &err);
    if (status < 0)
        return lslua_fail(L, status, &err);
    lua_pushnumber(L, top);
    lua_pushnumber(L, bottom);
    return lslua_done(L, 2, status, &err);
}

static int stackup_interval(lua_State *L)
{
    lstub_interval interval;
    lstub_error err;
    int32_t status;
    LSTUB_INIT(err);
    LSTUB_INIT(interval);
    lslua_stackup(L, 1, 1);
    lslua_most(L, 3);
    luaL_checktype(L, 2, LUA_TNUMBER);
    luaL_checktype(L, 3, LUA_TNUMBER);
    status = lstub_stackup_interval(lslua_stackup(L, 1, 1), (double)lua_tonumber(L, 2), (double)lua_tonumber(L, 3),
                                    &interval, &err);
    if (status < 0)
        return lslua_fail(L, status, &err);
    lua_createtable(L, 0, 8);
    lslua_set_number(L, "thickness", interval.thickness);
    lslua_set_number(L, "tol_plus", interval.tol_plus);
    lslua_set_number(L, "tol_minus", interval.tol_minus);
    lslua_set_number(L, "tol_rss_plus", interval.tol_rss_plus);
    lslua_set_number(L, "tol_rss_minus", interval.tol_rss_minus);
    lslua_set_number(L, "dk_through_plane", interval.dk_through_plane);
    lslua_set_number(L, "dk_in_plane", interval.dk_in_plane);
    lslua_set_number(L, "loss_tangent", interval.loss_tangent);
    return lslua_done(L, 1, status, &err);
}

/* with_in_plane_ratio(ratio) */
static int stackup_with_in_plane_ratio(lua_State *L)
{
    lstub_allocator allocator;
    lstub_stackup *made = NULL;
    lstub_error err;
    lslua_object *object;
    double ratio;
    int32_t status;
    LSTUB_INIT(err);
    lslua_stackup(L, 1, 1);
    lslua_most(L, 2);
    luaL_checktype(L, 2, LUA_TNUMBER);
    ratio = (double)lua_tonumber(L, 2);
    object = lslua_push_stackup(L, &allocator);
    status = lstub_stackup_with_in_plane_ratio(lslua_stackup(L, 1, 1), ratio, &allocator, &made, &err);
    object->handle = made;
    if (status < 0)
        return lslua_fail(L, status, &err);
    lslua_fill_names(L);
    lslua_charge(L, object);
    return lslua_done(L, 1, status, &err);
}

static void destroy(void *handle) { lstub_stackup_destroy(handle); }
static int stackup_close(lua_State *L) { return lslua_close(L, LSLUA_STACKUP, destroy); }

static int stackup_tostring(lua_State *L)
{
    const lslua_object *object = luaL_checkudata(L, 1, LSLUA_STACKUP);
    const lstub_stackup *stackup = object->handle;
    double top = 0.0, bottom = 0.0;
    char text[96];
    int32_t n;
    if (stackup == NULL || (object->owner != NULL && object->owner->handle == NULL)) {
        lua_pushliteral(L, LSLUA_STACKUP " (closed)");
        return 1;
    }
    n = lstub_stackup_count(stackup);
    lstub_stackup_depth(stackup, 0, &top, NULL, NULL);
    lstub_stackup_depth(stackup, n - 1, NULL, &bottom, NULL);
    snprintf(text, sizeof text, "%s: %ld layers, %ld of copper, %.4g mm", LSLUA_STACKUP, (long)n,
             (long)lstub_stackup_copper_count(stackup), (bottom - top) * 1e3);
    lua_pushstring(L, text);
    return 1;
}

void lslua_open_stackup(lua_State *L)
{
    static const luaL_Reg methods[] = {
        {"count", stackup_count}, {"copper_count", stackup_copper_count}, {"layer", stackup_layer},
        {"layers", stackup_layers}, {"find", stackup_find}, {"copper", stackup_copper}, {"depth", stackup_depth},
        {"interval", stackup_interval}, {"with_in_plane_ratio", stackup_with_in_plane_ratio}, {NULL, NULL}
    };
    lslua_type(L, LSLUA_STACKUP, methods, stackup_close, stackup_tostring, stackup_count);
}
