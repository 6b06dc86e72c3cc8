/* libstub.transition: the whole via as a network. */
#include "lslua.h"

#include <string.h>

static const char *const transition_keys[] = {"ports", "stubs", "annuli", "metal", "table_up_to", NULL};
static const char *const port_keys[] = {
    "layer", "kind", "trace", "impedance", "dk", "loss_tangent", "width", "distance", "z_ref", NULL
};
static const char *const notch_keys[] = {"to", "from", "mode", NULL};

static const lslua_word port_kinds[] = {{"trace", LSTUB_PORT_TRACE}, {"coax", LSTUB_PORT_COAX}, {NULL, 0}};
static const lslua_word stubs[] = {{"kept", LSTUB_STUBS_KEPT}, {"removed", LSTUB_STUBS_REMOVED}, {NULL, 0}};
static const lslua_word metals[] = {{"lossy", LSTUB_METAL_LOSSY}, {"perfect", LSTUB_METAL_PERFECT}, {NULL, 0}};
static const lslua_word modes[] = {
    {"single", LSTUB_MODE_SINGLE}, {"odd", LSTUB_MODE_ODD}, {"even", LSTUB_MODE_EVEN}, {NULL, 0}
};
static const lslua_word remarks[] = {
    {"radiates", LSTUB_REMARK_RADIATES}, {"launch", LSTUB_REMARK_LAUNCH}, {"outer", LSTUB_REMARK_OUTER},
    {"slot", LSTUB_REMARK_SLOT}, {"unequal", LSTUB_REMARK_UNEQUAL}, {NULL, 0}
};

static lstub_transition *check_transition(lua_State *L)
{
    return lslua_handle(L, 1, 1, LSLUA_TRANSITION);
}

/* ---- making one ---- */

static int32_t read_port(const lslua_at *at, int stackup, lstub_port *port, lslua_trace *trace, lstub_error *err)
{
    lua_State *L = at->L;
    lslua_at inner;
    int32_t status;
    LSTUB_INIT(*port);
    lslua_check_keys(at, port_keys);
    lslua_word_field(at, "kind", port_kinds, &port->kind);
    lslua_number(at, "impedance", &port->impedance);
    lslua_number(at, "dk", &port->dk);
    lslua_number(at, "loss_tangent", &port->loss_tangent);
    lslua_number(at, "width", &port->width);
    lslua_number(at, "distance", &port->distance);
    lslua_number(at, "z_ref", &port->z_ref);
    if (lslua_table(at, "trace", &inner)) {
        lslua_read_trace(&inner, trace);
        port->trace = &trace->trace;
        lua_pop(L, 1);
    }
    lslua_need(at, "layer", lslua_field(at, "layer"));
    status = lslua_layer(at, "layer", stackup, lua_gettop(L), &port->layer, err);
    lua_pop(L, 1);
    return status;
}

/* The list of ports; pushes two arrays that keep them. */
static int32_t read_ports(const lslua_at *options, int stackup, const lstub_port **ports, size_t *count, lstub_error *err)
{
    lua_State *L = options->L;
    lslua_at list, at;
    lstub_port *to;
    lslua_trace *traces;
    size_t i;
    int32_t status = LSTUB_OK;
    lslua_need(options, "ports", lslua_table(options, "ports", &list));
    *count = (size_t)lua_rawlen(L, list.table);
    to = lslua_scratch(L, *count, sizeof *to);
    traces = lslua_scratch(L, *count, sizeof *traces);
    *ports = to;
    at = *options;
    at.list = "ports";
    for (i = 0; i < *count && status == LSTUB_OK; i++) {
        at.item = (lua_Integer)i + 1;
        if (lua_rawgeti(L, list.table, at.item) != LUA_TTABLE)
            lslua_wrong_type(&at, NULL, "table", -1);
        at.table = lua_gettop(L);
        status = read_port(&at, stackup, &to[i], &traces[i], err);
        lua_pop(L, 1);
    }
    return status;
}

/* transition(via, options) */
int lslua_transition_new(lua_State *L)
{
    const lslua_via *v = lslua_check_via(L, 1);
    lslua_at at = lslua_options(L, 2, transition_keys);
    lstub_transition_options options;
    lstub_allocator allocator;
    lstub_transition *made = NULL;
    const lstub_port *ports;
    lstub_error err;
    lslua_object *object;
    size_t count;
    int32_t status;
    LSTUB_INIT(err);
    LSTUB_INIT(options);
    lslua_most(L, 2);
    lslua_word_field(&at, "stubs", stubs, &options.stubs);
    lslua_word_field(&at, "metal", metals, &options.metal);
    lslua_integer(&at, "annuli", &options.annuli);
    lslua_number(&at, "table_up_to", &options.f_table);
    lua_getiuservalue(L, 1, 1);
    lslua_stackup(L, 3, 0);
    status = read_ports(&at, 3, &ports, &count, &err);
    if (status < 0)
        return lslua_fail(L, status, &err);
    object = lslua_new(L, LSLUA_TRANSITION, 0, &allocator);
    status = lstub_transition_create(lslua_stackup(L, 3, 0), &v->via, ports, count, sizeof *ports, &options, &allocator,
                                     &made, &err);
    object->handle = made;
    if (status < 0)
        return lslua_fail(L, status, &err);
    lslua_charge(L, object);
    return lslua_done(L, 1, status, &err);
}

/* ---- methods ---- */

static int transition_ports(lua_State *L)
{
    check_transition(L);
    lslua_most(L, 1);
    lua_pushinteger(L, lstub_transition_ports(check_transition(L)));
    return 1;
}

static int transition_reference(lua_State *L)
{
    lstub_error err;
    lua_Integer n;
    double z_ref;
    int32_t ports, status;
    LSTUB_INIT(err);
    check_transition(L);
    lslua_most(L, 2);
    n = lslua_whole(L, 2);
    ports = lstub_transition_ports(check_transition(L));
    if (n < 1 || n > ports)
        status = lslua_refuse(&err, LSTUB_E_ARGUMENT, "port %lld: must be 1 to %ld", (long long)n, (long)ports);
    else
        status = lstub_transition_reference(check_transition(L), (int32_t)(n - 1), &z_ref, &err);
    if (status < 0)
        return lslua_fail(L, status, &err);
    lua_pushnumber(L, z_ref);
    return lslua_done(L, 1, status, &err);
}

static int transition_remarks(lua_State *L)
{
    check_transition(L);
    lslua_most(L, 1);
    lslua_push_flags(L, remarks, lstub_transition_remarks(check_transition(L)));
    return 1;
}

/* remark_text(remark) */
int lslua_remark_text(lua_State *L)
{
    lslua_at at = {0};
    at.L = L;
    at.arg = 1;
    luaL_checktype(L, 1, LUA_TSTRING);
    lslua_most(L, 1);
    lua_pushstring(L, lstub_remark_text(lslua_word_at(&at, NULL, remarks, 1)));
    return 1;
}

/* s(freq) */
static int transition_s(lua_State *L)
{
    lslua_at at = {0};
    double one, *out;
    const double *freq = &one;
    int32_t *each, status;
    size_t n = 1;
    lstub_error err;
    LSTUB_INIT(err);
    check_transition(L);
    lslua_most(L, 2);
    at.L = L;
    at.arg = 2;
    if (lua_type(L, 2) == LUA_TNUMBER)
        one = (double)lua_tonumber(L, 2);
    else
        freq = lslua_numbers(L, &at, NULL, 2, &n);
    each = lslua_new_status(L, n);
    out = lslua_push_complex(L, n, lstub_transition_ports(check_transition(L)));
    status = lstub_transition_s(check_transition(L), freq, n, out, each, &err);
    return lslua_items(L, 1, status, each, n, &err);
}

/* What { to =, from =, mode = } at argument 3 says: from the first port to the second of a single one, if it says nothing. */
static int32_t notch_option(lua_State *L, int32_t *mode, int32_t *to, int32_t *from, lstub_error *err)
{
    lslua_at at;
    int32_t ports = lstub_transition_ports(check_transition(L));
    *mode = LSTUB_MODE_SINGLE;
    *from = 0;
    *to = ports > 1;
    if (lua_isnoneornil(L, 3))
        return LSTUB_OK;
    at = lslua_options(L, 3, notch_keys);
    lslua_word_field(&at, "mode", modes, mode);
    lslua_port(&at, "to", ports, to, err);
    lslua_port(&at, "from", ports, from, err);
    return err->status;
}

/* notches(f_max, options): all of them, however many. */
static int transition_notches(lua_State *L)
{
    lstub_notch *notches;
    size_t capacity = 16, count = 0, i;
    int32_t mode, to, from, status;
    double f_max;
    lstub_error err;
    LSTUB_INIT(err);
    check_transition(L);
    luaL_checktype(L, 2, LUA_TNUMBER);
    lslua_most(L, 3);
    f_max = (double)lua_tonumber(L, 2);
    status = notch_option(L, &mode, &to, &from, &err);
    if (status < 0)
        return lslua_fail(L, status, &err);
    for (;;) {
        notches = lslua_scratch(L, capacity, sizeof *notches);
        for (i = 0; i < capacity; i++)
            LSTUB_INIT(notches[i]);
        status = lstub_transition_notches(check_transition(L), mode, to, from, f_max, notches, capacity,
                                          sizeof *notches, &count, &err);
        if (count <= capacity)
            break;
        capacity = count;
        lua_pop(L, 1);
    }
    if (status == LSTUB_E_ARGUMENT && (strcmp(err.field, "to") == 0 || strcmp(err.field, "from") == 0))
        lslua_refuse(&err, status, "%s = %ld: must be 1 to %ld, a port of the first barrel", err.field,
                     (long)(err.field[0] == 't' ? to : from) + 1, (long)lstub_transition_ports(check_transition(L)) / 2);
    if (status < 0)
        return lslua_fail(L, status, &err);
    lslua_push_notches(L, notches, count);
    return lslua_done(L, 1, status, &err);
}

/* ---- life ---- */

static void destroy(void *handle) { lstub_transition_destroy(handle); }
static int transition_close(lua_State *L) { return lslua_close(L, LSLUA_TRANSITION, destroy); }

static int transition_tostring(lua_State *L)
{
    const lslua_object *object = luaL_checkudata(L, 1, LSLUA_TRANSITION);
    int32_t n;
    if (object->handle == NULL) {
        lua_pushliteral(L, LSLUA_TRANSITION " (closed)");
        return 1;
    }
    n = lstub_transition_ports(object->handle);
    lua_pushfstring(L, "%s: %d %s", LSLUA_TRANSITION, (int)n, n == 1 ? "port" : "ports");
    return 1;
}

void lslua_open_transition(lua_State *L)
{
    static const luaL_Reg methods[] = {
        {"ports", transition_ports}, {"reference", transition_reference}, {"remarks", transition_remarks}, {"s", transition_s},
        {"notches", transition_notches}, {NULL, NULL}
    };
    lslua_type(L, LSLUA_TRANSITION, methods, transition_close, transition_tostring, NULL);
}
