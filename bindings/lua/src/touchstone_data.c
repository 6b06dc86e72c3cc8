/* What a Touchstone file holds, as a table. */
#include "lslua.h"

#include <string.h>

static const lslua_word parameters[] = {
    {"S", LSTUB_NETWORK_S}, {"Z", LSTUB_NETWORK_Z}, {"Y", LSTUB_NETWORK_Y}, {"G", LSTUB_NETWORK_G}, {"H", LSTUB_NETWORK_H},
    {NULL, 0}
};
static const lslua_word formats[] = {{"RI", LSTUB_FORMAT_RI}, {"MA", LSTUB_FORMAT_MA}, {"DB", LSTUB_FORMAT_DB}, {NULL, 0}};
static const lslua_word units[] = {
    {"Hz", LSTUB_UNIT_HZ}, {"kHz", LSTUB_UNIT_KHZ}, {"MHz", LSTUB_UNIT_MHZ}, {"GHz", LSTUB_UNIT_GHZ}, {NULL, 0}
};
static const lslua_word matrices[] = {
    {"full", LSTUB_MATRIX_FULL}, {"lower", LSTUB_MATRIX_LOWER}, {"upper", LSTUB_MATRIX_UPPER}, {NULL, 0}
};
static const lslua_word orders[] = {{"21_12", LSTUB_ORDER_21_12}, {"12_21", LSTUB_ORDER_12_21}, {NULL, 0}};
static const lslua_word row_kinds[] = {
    {"single", LSTUB_ROW_SINGLE}, {"differential", LSTUB_ROW_DIFFERENTIAL}, {"common", LSTUB_ROW_COMMON}, {NULL, 0}
};

static const char *const data_keys[] = {
    "version", "ports", "parameter", "format", "unit", "matrix", "order", "digits", "points", "noise_points", "freq", "data",
    "reference", "rows", "comments", NULL
};
static const char *const row_keys[] = {"kind", "port", "partner", NULL};

/* ---- out ---- */

/* The file's data; its pointers hold until Lua is called, which may close it. */
static lstub_touchstone_data data_of(lua_State *L, int file)
{
    lstub_touchstone_data data;
    LSTUB_INIT(data);
    if (lstub_touchstone_get(lslua_handle(L, file, file, LSLUA_TOUCHSTONE), &data, NULL) < 0)
        luaL_error(L, "module and library do not fit: touchstone_get");
    return data;
}

static void set_rows(lua_State *L, int file, int32_t ports)
{
    int32_t i;
    lua_createtable(L, ports, 0);
    for (i = 0; i < ports; i++) {
        lstub_touchstone_row row = data_of(L, file).rows[i];
        lua_createtable(L, 0, 3);
        lslua_set_string(L, "kind", lslua_word_of(row_kinds, row.kind));
        lslua_set_integer(L, "port", (int64_t)row.port + 1);
        if (row.partner >= 0)
            lslua_set_integer(L, "partner", (int64_t)row.partner + 1);
        lua_rawseti(L, -2, (lua_Integer)i + 1);
    }
    lua_setfield(L, -2, "rows");
}

static void set_comments(lua_State *L, int file, size_t count)
{
    size_t i;
    lua_createtable(L, (int)count, 0);
    for (i = 0; i < count; i++) {
        lua_pushstring(L, data_of(L, file).comments[i]);
        lua_rawseti(L, -2, (lua_Integer)i + 1);
    }
    lua_setfield(L, -2, "comments");
}

int lslua_push_touchstone_data(lua_State *L, int file)
{
    lstub_touchstone_data data = data_of(L, file);
    size_t width = 2 * (size_t)data.ports * (size_t)data.ports;
    double *to;
    lua_createtable(L, 0, 14);
    lslua_set_integer(L, "version", data.version);
    lslua_set_integer(L, "ports", data.ports);
    lslua_set_string(L, "parameter", lslua_word_of(parameters, data.parameter));
    lslua_set_string(L, "format", lslua_word_of(formats, data.format));
    lslua_set_string(L, "unit", lslua_word_of(units, data.unit));
    lslua_set_string(L, "matrix", lslua_word_of(matrices, data.matrix));
    lslua_set_string(L, "order", lslua_word_of(orders, data.order));
    lslua_set_integer(L, "points", (int64_t)data.points);
    lslua_set_integer(L, "noise_points", (int64_t)data.noise_points);
    to = lslua_push_array(L, data.points);
    if (data.points > 0)
        memcpy(to, data_of(L, file).freq, data.points * sizeof *to);
    lua_setfield(L, -2, "freq");
    to = lslua_push_complex(L, data.points, data.ports);
    if (data.points > 0)
        memcpy(to, data_of(L, file).data, data.points * width * sizeof *to);
    lua_setfield(L, -2, "data");
    to = lslua_push_array(L, (size_t)data.ports);
    memcpy(to, data_of(L, file).reference, (size_t)data.ports * sizeof *to);
    lua_setfield(L, -2, "reference");
    if (data.rows != NULL)
        set_rows(L, file, data.ports);
    set_comments(L, file, data.comment_count);
    return 1;
}

/* ---- in ---- */

/* An integer that says how long something is; it must be that long. */
static void check_count(const lslua_at *at, const char *key, size_t count, const char *of)
{
    int32_t said;
    if (lslua_integer(at, key, &said) && (said < 0 || (size_t)said != count))
        lslua_complain(at, key, "%d, but %s has %I", (int)said, of, (LUAI_UACINT)count);
}

/* freq and data, which stay on the stack. */
static void read_points(const lslua_at *at, lstub_touchstone_data *to)
{
    size_t count = 0;
    lslua_need(at, "data", lslua_field(at, "data"));
    to->data = lslua_complex(at->L, at, "data", lua_gettop(at->L), &to->points, &to->ports);
    lslua_need(at, "freq", lslua_field(at, "freq"));
    to->freq = lslua_numbers(at->L, at, "freq", lua_gettop(at->L), &count);
    if (count != to->points)
        lslua_complain(at, "freq", "%I frequencies for %I matrices", (LUAI_UACINT)count, (LUAI_UACINT)to->points);
    check_count(at, "ports", (size_t)to->ports, "data");
    check_count(at, "points", to->points, "data");
}

/* One for all ports, or a list. */
static void read_reference(const lslua_at *at, lstub_touchstone_data *to)
{
    lua_State *L = at->L;
    size_t count = 0, i;
    double *z;
    if (!lslua_field(at, "reference"))
        return;
    if (lua_type(L, -1) != LUA_TNUMBER) {
        to->reference = lslua_numbers(L, at, "reference", lua_gettop(L), &count);
        if (count != (size_t)to->ports)
            lslua_complain(at, "reference", "%I numbers for %d ports", (LUAI_UACINT)count, (int)to->ports);
        return;
    }
    z = lslua_scratch(L, (size_t)to->ports, sizeof *z);
    for (i = 0; i < (size_t)to->ports; i++)
        z[i] = (double)lua_tonumber(L, -2);
    to->reference = z;
}

/* The list under `key` and its length; 0 where there is none. */
static int list_of(const lslua_at *at, const char *key, lslua_at *list, size_t *count)
{
    if (!lslua_table(at, key, list))
        return 0;
    *count = (size_t)lua_rawlen(at->L, list->table);
    list->list = key;
    list->member = NULL;
    return 1;
}

static void read_rows(const lslua_at *at, lstub_touchstone_data *to)
{
    lua_State *L = at->L;
    lslua_at item;
    lstub_touchstone_row *rows;
    size_t count = 0, i;
    if (!list_of(at, "rows", &item, &count))
        return;
    if (count != (size_t)to->ports)
        lslua_complain(at, "rows", "%I rows for %d ports", (LUAI_UACINT)count, (int)to->ports);
    rows = lslua_scratch(L, count, sizeof *rows);
    to->rows = rows;
    for (i = 0; i < count; i++) {
        int list = item.table;
        item.item = (lua_Integer)i + 1;
        if (lua_rawgeti(L, list, item.item) != LUA_TTABLE)
            lslua_wrong_type(&item, NULL, "table", -1);
        item.table = lua_gettop(L);
        lslua_check_keys(&item, row_keys);
        lslua_need(&item, "kind", lslua_word_field(&item, "kind", row_kinds, &rows[i].kind));
        lslua_need(&item, "port", lslua_integer(&item, "port", &rows[i].port));
        lslua_integer(&item, "partner", &rows[i].partner);    /* 0 where there is none */
        if (rows[i].port < 1 || rows[i].port > to->ports)
            lslua_complain(&item, "port", "must be 1 to %d", (int)to->ports);
        if (rows[i].partner < 0 || rows[i].partner > to->ports)
            lslua_complain(&item, "partner", "must be 1 to %d", (int)to->ports);
        rows[i].port--;
        rows[i].partner--;
        item.table = list;
        lua_pop(L, 1);
    }
}

static void read_comments(const lslua_at *at, lstub_touchstone_data *to)
{
    lua_State *L = at->L;
    lslua_at item;
    const char **comments;
    size_t count = 0, i;
    if (!list_of(at, "comments", &item, &count))
        return;
    comments = lslua_scratch(L, count, sizeof *comments);
    to->comments = (const char *const *)comments;
    to->comment_count = count;
    lua_createtable(L, (int)count, 0);      /* keeps them, whatever a sink does to the caller's list */
    for (i = 0; i < count; i++) {
        item.item = (lua_Integer)i + 1;
        lua_rawgeti(L, item.table, item.item);
        comments[i] = lslua_text(&item, NULL, -1);
        lua_rawseti(L, -2, item.item);
    }
}

void lslua_read_touchstone_data(lua_State *L, int arg, lstub_touchstone_data *to)
{
    lslua_at at = lslua_options(L, arg, data_keys);
    int32_t noise = 0;
    LSTUB_INIT(*to);
    luaL_checkstack(L, 16, NULL);
    lslua_integer(&at, "version", &to->version);
    lslua_word_field(&at, "parameter", parameters, &to->parameter);
    lslua_word_field(&at, "format", formats, &to->format);
    lslua_word_field(&at, "unit", units, &to->unit);
    lslua_word_field(&at, "matrix", matrices, &to->matrix);
    lslua_word_field(&at, "order", orders, &to->order);
    lslua_integer(&at, "digits", &to->digits);
    lslua_integer(&at, "noise_points", &noise);
    if (noise < 0)
        lslua_complain(&at, "noise_points", "must be >= 0");
    to->noise_points = (size_t)noise;
    read_points(&at, to);
    read_reference(&at, to);
    read_rows(&at, to);
    read_comments(&at, to);
}
