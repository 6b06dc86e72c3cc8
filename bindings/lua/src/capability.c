/* What the fabricator can do: a table in, the same table out. */
#include "lslua.h"

static const lslua_word methods[] = {
    {"worst", LSTUB_TOLERANCE_WORST}, {"rss", LSTUB_TOLERANCE_RSS}, {NULL, 0}
};
static const char *const keys[] = {
    "sides", "tolerance_method", "depth_tolerance", "cut_clearance", "residual_min", "residual_target", "bit_oversize",
    "wall_clearance", "aspect_ratio", "depths", NULL
};

void lslua_read_capability(lua_State *L, int arg, lstub_capability *capability)
{
    lslua_at at = lslua_options(L, arg, keys);
    LSTUB_INIT(*capability);
    lslua_word_field(&at, "sides", lslua_all_sides, &capability->sides);
    lslua_word_field(&at, "tolerance_method", methods, &capability->tolerance_method);
    lslua_number(&at, "depth_tolerance", &capability->depth_tolerance);
    lslua_number(&at, "cut_clearance", &capability->cut_clearance);
    lslua_number(&at, "residual_min", &capability->residual_min);
    lslua_number(&at, "residual_target", &capability->residual_target);
    lslua_number(&at, "bit_oversize", &capability->bit_oversize);
    lslua_number(&at, "wall_clearance", &capability->wall_clearance);
    lslua_number(&at, "aspect_ratio", &capability->aspect_ratio);
    if (lslua_field(&at, "depths"))
        capability->depths = lslua_numbers(L, &at, "depths", lua_gettop(L), &capability->depth_count);
}

void lslua_push_capability(lua_State *L, const lstub_capability *capability)
{
    int32_t sides = capability->sides == 0 ? LSTUB_SIDE_BOTH : capability->sides;
    size_t i;
    lua_createtable(L, 0, 10);
    lslua_set_string(L, "sides", lslua_word_of(lslua_all_sides, sides));
    lslua_set_string(L, "tolerance_method", lslua_word_of(methods, capability->tolerance_method));
    lslua_set_number(L, "depth_tolerance", capability->depth_tolerance);
    lslua_set_number(L, "cut_clearance", capability->cut_clearance);
    lslua_set_number(L, "residual_min", capability->residual_min);
    lslua_set_number(L, "residual_target", capability->residual_target);
    lslua_set_number(L, "bit_oversize", capability->bit_oversize);
    lslua_set_number(L, "wall_clearance", capability->wall_clearance);
    lslua_set_number(L, "aspect_ratio", capability->aspect_ratio);
    if (capability->depth_count == 0)
        return;
    lua_createtable(L, (int)capability->depth_count, 0);
    for (i = 0; i < capability->depth_count; i++) {
        lua_pushnumber(L, capability->depths[i]);
        lua_rawseti(L, -2, (lua_Integer)i + 1);
    }
    lua_setfield(L, -2, "depths");
}
