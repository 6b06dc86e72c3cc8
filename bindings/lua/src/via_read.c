/* A via from its option table. */
#include "via.h"

static const char *const via_keys[] = {
    "start_layer", "end_layer", "drill", "pad", "pad_start", "pad_inner", "pad_end", "antipad", "pads", "antipads",
    "clear", "nonfunctional_pads", "connects", "returns", "pair", "backdrills", "pin", "outside_dk", "lid_distance",
    "hole_dk", "edges", NULL
};
static const char *const return_keys[] = {"count", "distance", "drill", "wall", "xy", "spans", NULL};
static const char *const pair_keys[] = {"pitch", "shared", "backdrills", NULL};
static const char *const edge_keys[] = {"left", "right", "front", "back", "shorted", NULL};
static const char *const pin_keys[] = {"side", "length", NULL};
static const char *const backdrill_keys[] = {"side", "depth", "diameter", NULL};

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
    to = lslua_via_array(L, r->via, value, *count, sizeof *to);
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
    to = lslua_via_array(L, r->via, VALUE_CONNECTS, count, sizeof *to);
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

/* The back-drills of `at`, which messages call `list`; whether there are any to read. */
static int read_backdrills(const reading *r, const lslua_at *at, const char *name, int value,
                          const lstub_backdrill **drills, size_t *count)
{
    lua_State *L = at->L;
    lslua_at list;
    lstub_backdrill *to;
    size_t i;
    if (!lslua_table(at, "backdrills", &list))
        return 0;
    *count = (size_t)lua_rawlen(L, list.table);
    to = lslua_via_array(L, r->via, value, *count, sizeof *to);
    *drills = to;
    for (i = 0; i < *count; i++) {
        lslua_at item = r->at;
        item.list = name;
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
    return 1;
}

/* { { x, y }, ... } on top of the stack, the places of the return vias. Pops it. */
static void read_places(const reading *r, lslua_at list)
{
    lua_State *L = r->at.L;
    size_t i, count = (size_t)lua_rawlen(L, list.table);
    double *to = lslua_via_array(L, r->via, VALUE_RETURNS, count, 2 * sizeof *to);
    r->to->return_xy = to;
    r->to->return_count = (int32_t)count;
    list.list = "returns.xy";
    list.member = list.within = NULL;
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

/* The copper layer in the value on top, one end of the span of a return via; pops it. */
static int32_t read_span_layer(const reading *r, const lslua_at *at, int32_t *layer)
{
    lua_State *L = at->L;
    lstub_layer found;
    int32_t status = lslua_layer(at, NULL, r->stackup, lua_gettop(L), layer, r->err);
    lua_pop(L, 1);
    LSTUB_INIT(found);
    if (status == LSTUB_OK)
        status = lstub_stackup_layer(lslua_stackup(L, r->stackup, 0), *layer, &found, r->err);
    if (status == LSTUB_OK && found.kind == LSTUB_LAYER_DIELECTRIC)
        return lslua_refuse(r->err, LSTUB_E_ARGUMENT, "%s[%lld]: layer %ld '%.100s': must be a copper layer", at->list,
                            (long long)at->item, (long)*layer + 1, found.name);
    return status;
}

/* { { first, last }, ... } on top of the stack, the layers that each return via joins. Pops it. */
static int32_t read_spans(const reading *r, lslua_at list)
{
    lua_State *L = r->at.L;
    size_t i, count = (size_t)lua_rawlen(L, list.table);
    int32_t *to, status = LSTUB_OK;
    if (count != (size_t)r->to->return_count)
        lslua_complain(&list, NULL, "%I items for %d return vias", (LUAI_UACINT)count, (int)r->to->return_count);
    to = lslua_via_array(L, r->via, VALUE_SPANS, count, 2 * sizeof *to);
    r->to->return_spans = to;
    list.list = "returns.spans";
    list.member = list.within = NULL;
    for (i = 0; i < count && status == LSTUB_OK; i++, to += 2) {
        int k;
        list.item = (lua_Integer)i + 1;
        if (lua_rawgeti(L, list.table, list.item) != LUA_TTABLE)
            lslua_wrong_type(&list, NULL, "table", -1);
        if (lua_rawlen(L, -1) != 2)
            lslua_complain(&list, NULL, "{ first, last } expected, got %d items", (int)lua_rawlen(L, -1));
        for (k = 0; k < 2 && status == LSTUB_OK; k++) {
            lua_rawgeti(L, -1, k + 1);
            status = read_span_layer(r, &list, &to[k]);
        }
        if (status == LSTUB_OK && to[1] <= to[0])
            status = lslua_refuse(r->err, LSTUB_E_GEOMETRY, "returns.spans[%lld]: layer %ld: must be below layer %ld",
                                  (long long)list.item, (long)to[1] + 1, (long)to[0] + 1);
        lua_pop(L, 1);
    }
    lua_pop(L, 1);
    return status;
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

static int32_t read_returns(const reading *r)
{
    static const char *const beside_wall[] = {"count", "distance", "drill", "xy", "spans", NULL};
    static const char *const beside_xy[] = {"count", "distance", NULL};
    lslua_at at, list;
    lstub_via *to = r->to;
    int32_t status = LSTUB_OK;
    if (!lslua_table(&r->at, "returns", &at))
        return status;
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
    if (lslua_table(&at, "spans", &list)) {
        if (to->return_xy == NULL)
            lslua_complain(&at, "spans", "only together with xy");
        status = read_spans(r, list);
    }
    lua_pop(at.L, 1);
    return status;
}

static void read_edges(const reading *r)
{
    lslua_at at;
    int32_t shorted = 0;
    int i;
    if (!lslua_table(&r->at, "edges", &at))
        return;
    lslua_check_keys(&at, edge_keys);
    for (i = 0; i < 4; i++)
        lslua_need(&at, lslua_edge_sides[i], lslua_number(&at, lslua_edge_sides[i], &r->to->edges[i]));
    lslua_boolean(&at, "shorted", &shorted);
    r->to->edge_kind = shorted ? LSTUB_EDGE_SHORTED : LSTUB_EDGE_OPEN;
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
        r->to->partner_own = read_backdrills(r, &at, "pair.backdrills", VALUE_PARTNER, &r->to->partner_backdrills,
                                             &r->to->partner_backdrill_count);
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
    lslua_word_field(&r->at, "nonfunctional_pads", lslua_pad_words, &to->nonfunctional_pads);
    read_pair_and_pin(r);
    read_backdrills(r, &r->at, "backdrills", VALUE_BACKDRILLS, &to->backdrills, &to->backdrill_count);
    read_edges(r);
    if ((status = read_returns(r)) < 0 || (status = read_span(r)) < 0
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
    r.to = &lslua_push_new_via(L, 1)->via;
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
