/* libstub.plan: user value 1 is the list of layer names. */
#include "lslua.h"

#include <limits.h>
#include <string.h>

static const lslua_word actions[] = {
    {"not_judged", LSTUB_ACTION_NOT_JUDGED}, {"keep", LSTUB_ACTION_KEEP}, {"drill_top", LSTUB_ACTION_DRILL_TOP},
    {"drill_bottom", LSTUB_ACTION_DRILL_BOTTOM}, {"drill_both", LSTUB_ACTION_DRILL_BOTH},
    {"cannot", LSTUB_ACTION_CANNOT}, {"refused", LSTUB_ACTION_REFUSED}, {NULL, 0}
};
static const lslua_word reasons[] = {
    {"no_signal", LSTUB_REASON_NO_SIGNAL}, {"no_stub", LSTUB_REASON_NO_STUB}, {"passes", LSTUB_REASON_PASSES},
    {"fails", LSTUB_REASON_FAILS}, {"limit_too_short", LSTUB_REASON_LIMIT_TOO_SHORT},
    {"no_room", LSTUB_REASON_NO_ROOM}, {"side", LSTUB_REASON_SIDE}, {"wall", LSTUB_REASON_WALL},
    {"aspect", LSTUB_REASON_ASPECT}, {"depths", LSTUB_REASON_DEPTHS}, {"pin", LSTUB_REASON_PIN},
    {"buried", LSTUB_REASON_BURIED}, {"drilled", LSTUB_REASON_DRILLED}, {"error", LSTUB_REASON_ERROR},
    {"one_layer", LSTUB_REASON_ONE_LAYER}, {NULL, 0}
};
static const char *const job_keys[] = {"via", "signal", "criteria", NULL};

/* ---- making one ---- */

typedef struct jobs {           /* scratch, one of each per job                                        */
    lstub_job      *job;
    lstub_signal   *signal;
    lstub_criteria *criteria;
} jobs;

/* The via of a job; it is kept in the table at stack index `kept`. */
static const lstub_via *read_via(const lslua_at *at, int kept)
{
    lua_State *L = at->L;
    const lslua_via *v;
    lslua_need(at, "via", lslua_field(at, "via"));
    v = luaL_testudata(L, -1, LSLUA_VIA);
    if (v == NULL)
        lslua_wrong_type(at, "via", LSLUA_VIA, -1);
    if (v->closed)
        lslua_complain(at, "via", "closed %s", LSLUA_VIA);
    lua_getiuservalue(L, -1, 1);
    if (!lua_rawequal(L, -1, 1))
        lslua_complain(at, "via", "made on another stackup");
    lua_pop(L, 1);
    lua_rawseti(L, kept, at->item);
    return &v->via;
}

static void read_job(const lslua_at *at, const jobs *to, size_t i, int kept)
{
    lslua_at inner;
    lslua_check_keys(at, job_keys);
    LSTUB_INIT(to->job[i]);
    to->job[i].via = read_via(at, kept);
    if (lslua_table(at, "signal", &inner)) {
        lslua_read_signal(&inner, &to->signal[i]);
        to->job[i].signal = &to->signal[i];
        lua_pop(at->L, 1);
    }
    if (lslua_table(at, "criteria", &inner)) {
        lslua_read_criteria(&inner, &to->criteria[i]);
        to->job[i].criteria = &to->criteria[i];
        lua_pop(at->L, 1);
    }
    if (to->job[i].signal != NULL)
        lslua_need(at, "criteria", to->job[i].criteria != NULL);
}

/* plan(stackup, jobs, capability, options) */
int lslua_plan_new(lua_State *L)
{
    lslua_at at = {0};
    jobs to;
    lstub_capability capability;
    lstub_model_options options;
    lstub_allocator allocator;
    lstub_plan *made = NULL;
    lstub_error err;
    lslua_object *object;
    size_t i, n;
    int kept;
    int32_t status;
    LSTUB_INIT(err);
    lslua_stackup(L, 1, 1);
    luaL_checktype(L, 2, LUA_TTABLE);
    lslua_most(L, 4);
    lslua_model_argument(L, 4, &options);
    lua_settop(L, 4);
    lslua_read_capability(L, 3, &capability);
    n = (size_t)lua_rawlen(L, 2);
    to.job = lslua_scratch(L, n, sizeof *to.job);
    to.signal = lslua_scratch(L, n, sizeof *to.signal);
    to.criteria = lslua_scratch(L, n, sizeof *to.criteria);
    lua_newtable(L);
    kept = lua_gettop(L);
    at.L = L;
    at.arg = 2;
    at.list = "jobs";
    for (i = 0; i < n; i++) {
        at.item = (lua_Integer)i + 1;
        if (lua_rawgeti(L, 2, at.item) != LUA_TTABLE)
            lslua_wrong_type(&at, NULL, "table", -1);
        at.table = lua_gettop(L);
        read_job(&at, &to, i, kept);
        lua_pop(L, 1);
    }
    object = lslua_new(L, LSLUA_PLAN, 1, &allocator);
    lslua_push_names(L, 1);
    lua_setiuservalue(L, -2, 1);
    status = lstub_plan_create(lslua_stackup(L, 1, 1), to.job, n, sizeof *to.job, &capability, &options, &allocator,
                               &made, &err);
    object->handle = made;
    if (status < 0)
        return lslua_fail(L, status, &err);
    lslua_charge(L, object);
    return lslua_done(L, 1, status, &err);
}

/* ---- decisions ---- */

static lstub_plan *check_plan(lua_State *L)
{
    return lslua_handle(L, 1, 1, LSLUA_PLAN);
}

static void set_cut(lua_State *L, const char *key, int names, const lstub_drill_cut *cut)
{
    lua_createtable(L, 0, 11);
    lslua_set_boolean(L, "drilled", cut->drilled);
    if (cut->drilled) {
        lslua_set_number(L, "limit", cut->limit);
        lslua_set_layer(L, "must_not_cut", names, cut->must_not_cut);
        lslua_set_integer(L, "group", (int64_t)cut->group + 1);
        lslua_set_number(L, "depth", cut->depth);
        lslua_set_number(L, "depth_least", cut->depth_least);
        lslua_set_number(L, "depth_most", cut->depth_most);
        lslua_set_number(L, "diameter", cut->diameter);
        lslua_set_number(L, "residual", cut->residual);
        lslua_set_number(L, "residual_least", cut->residual_least);
        lslua_set_number(L, "residual_most", cut->residual_most);
    }
    lua_setfield(L, -2, key);
}

static void push_decision(lua_State *L, const lstub_decision *d, int names)
{
    int judged = d->action != LSTUB_ACTION_NOT_JUDGED && d->action != LSTUB_ACTION_REFUSED;
    lua_createtable(L, 0, 14);
    lslua_set_string(L, "action", lslua_word_of(actions, d->action));
    lslua_set_string(L, "reason", lslua_word_of(reasons, d->reason));
    lslua_set_string(L, "reason_side", lslua_word_of(lslua_all_sides, d->reason_side));
    lslua_set_layer(L, "reason_layer", names, d->reason_layer);
    lslua_set_number(L, "reason_value", d->reason_value);
    lslua_set_number(L, "reason_limit", d->reason_limit);
    lslua_set_integer(L, "status", d->status);
    lslua_set_integer(L, "stub_count", d->stub_count);
    lslua_set_number(L, "stub_top", d->stub_top);
    lslua_set_number(L, "stub_bottom", d->stub_bottom);
    set_cut(L, "top", names, &d->top);
    set_cut(L, "bottom", names, &d->bottom);
    if (judged) {
        lslua_push_margin(L, &d->before);
        lua_setfield(L, -2, "before");
        lslua_push_margin(L, &d->after);
        lua_setfield(L, -2, "after");
    }
}

static int plan_count(lua_State *L)
{
    lua_pushinteger(L, (lua_Integer)lstub_plan_count(check_plan(L)));
    return 1;
}

static int plan_decision(lua_State *L)
{
    lstub_decision decision;
    lstub_error err;
    int64_t index;
    int32_t status;
    LSTUB_INIT(err);
    LSTUB_INIT(decision);
    check_plan(L);
    lslua_most(L, 2);
    if (!lslua_item(L, 2, "via", (int64_t)lstub_plan_count(check_plan(L)), &index, &err))
        return lslua_fail(L, err.status, &err);
    status = lstub_plan_decision(check_plan(L), (size_t)index, &decision, &err);
    if (status < 0)
        return lslua_fail(L, status, &err);
    lua_getiuservalue(L, 1, 1);
    push_decision(L, &decision, lua_gettop(L));
    return lslua_done(L, 1, status, &err);
}

static int plan_reason(lua_State *L)
{
    char text[LSTUB_REASON_MAX];
    lstub_error err;
    int64_t index;
    int32_t status;
    LSTUB_INIT(err);
    check_plan(L);
    lslua_most(L, 2);
    if (!lslua_item(L, 2, "via", (int64_t)lstub_plan_count(check_plan(L)), &index, &err))
        return lslua_fail(L, err.status, &err);
    status = lstub_plan_reason(check_plan(L), (size_t)index, text, sizeof text, &err);
    if (status < 0)
        return lslua_fail(L, status, &err);
    lua_pushstring(L, text);
    return lslua_done(L, 1, status, &err);
}

/* ---- drill table and totals ---- */

static int plan_group_count(lua_State *L)
{
    check_plan(L);
    lslua_most(L, 1);
    lua_pushinteger(L, lstub_plan_group_count(check_plan(L)));
    return 1;
}

static int push_group(lua_State *L, int32_t index)
{
    lstub_drill_group group;
    lstub_error err;
    int32_t status;
    int names;
    LSTUB_INIT(err);
    LSTUB_INIT(group);
    status = lstub_plan_group(check_plan(L), index, &group, &err);
    if (status < 0)
        return lslua_fail(L, status, &err);
    lua_getiuservalue(L, 1, 1);
    names = lua_gettop(L);
    lua_createtable(L, 0, 8);
    lslua_set_string(L, "side", lslua_word_of(lslua_sides, group.side));
    lslua_set_layer(L, "from_layer", names, group.from_layer);
    lslua_set_layer(L, "must_not_cut", names, group.must_not_cut);
    lslua_set_integer(L, "hits", group.hits);
    lslua_set_number(L, "diameter", group.diameter);
    lslua_set_number(L, "depth", group.depth);
    lslua_set_number(L, "tolerance", group.tolerance);
    lslua_set_number(L, "residual_most", group.residual_most);
    lua_remove(L, names);
    return 1;
}

static int plan_group(lua_State *L)
{
    lstub_error err;
    int64_t index;
    LSTUB_INIT(err);
    check_plan(L);
    lslua_most(L, 2);
    if (!lslua_item(L, 2, "group", lstub_plan_group_count(check_plan(L)), &index, &err))
        return lslua_fail(L, err.status, &err);
    return push_group(L, (int32_t)index);
}

static int plan_groups(lua_State *L)
{
    int32_t i, n = lstub_plan_group_count(check_plan(L));
    lslua_most(L, 1);
    lua_createtable(L, n, 0);
    for (i = 0; i < n; i++) {
        int results = push_group(L, i);
        if (results != 1)
            return results;
        lua_rawseti(L, -2, (lua_Integer)i + 1);
    }
    return 1;
}

static int plan_totals(lua_State *L)
{
    lstub_plan_summary s;
    lstub_error err;
    int32_t status;
    LSTUB_INIT(err);
    LSTUB_INIT(s);
    check_plan(L);
    lslua_most(L, 1);
    status = lstub_plan_totals(check_plan(L), &s, &err);
    if (status < 0)
        return lslua_fail(L, status, &err);
    lua_createtable(L, 0, 15);
    lslua_set_integer(L, "vias", s.vias);
    lslua_set_integer(L, "not_judged", s.not_judged);
    lslua_set_integer(L, "keep", s.keep);
    lslua_set_integer(L, "drill_top", s.drill_top);
    lslua_set_integer(L, "drill_bottom", s.drill_bottom);
    lslua_set_integer(L, "drill_both", s.drill_both);
    lslua_set_integer(L, "cannot", s.cannot);
    lslua_set_integer(L, "refused", s.refused);
    lslua_set_integer(L, "outside_range", s.outside_range);
    lslua_set_integer(L, "depths_top", s.depths_top);
    lslua_set_integer(L, "depths_bottom", s.depths_bottom);
    lslua_set_integer(L, "groups", s.groups);
    lslua_set_integer(L, "geometries", s.geometries);
    lslua_set_number(L, "worst_notch_over_nyquist", s.worst_notch_over_nyquist);
    lslua_set_number(L, "worst_added_loss_db", s.worst_added_loss_db);
    return lslua_done(L, 1, status, &err);
}

/* ---- words ---- */

static int name_of(lua_State *L, const lslua_word *words, const char *(*name)(int32_t))
{
    lslua_at at = {0};
    lslua_most(L, 1);
    luaL_checktype(L, 1, LUA_TSTRING);
    at.L = L;
    at.arg = 1;
    lua_pushstring(L, name(lslua_word_at(&at, NULL, words, 1)));
    return 1;
}

int lslua_action_name(lua_State *L) { return name_of(L, actions, lstub_action_name); }
int lslua_reason_name(lua_State *L) { return name_of(L, reasons, lstub_reason_name); }

/* ---- life ---- */

static void destroy(void *handle) { lstub_plan_destroy(handle); }
static int plan_close(lua_State *L) { return lslua_close(L, LSLUA_PLAN, destroy); }

static int plan_tostring(lua_State *L)
{
    const lslua_object *object = luaL_checkudata(L, 1, LSLUA_PLAN);
    if (object->handle == NULL)
        lua_pushliteral(L, LSLUA_PLAN " (closed)");
    else
        lua_pushfstring(L, "%s: %I vias, %d drill groups", LSLUA_PLAN, (LUAI_UACINT)lstub_plan_count(object->handle),
                        (int)lstub_plan_group_count(object->handle));
    return 1;
}

void lslua_open_plan(lua_State *L)
{
    static const luaL_Reg methods[] = {
        {"count", plan_count}, {"decision", plan_decision}, {"reason", plan_reason}, {"group_count", plan_group_count},
        {"group", plan_group}, {"groups", plan_groups}, {"totals", plan_totals}, {NULL, NULL}
    };
    lslua_type(L, LSLUA_PLAN, methods, plan_close, plan_tostring, plan_count);
}
