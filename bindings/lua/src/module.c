/* require "libstub": the module table. */
#include "lslua.h"

static int version(lua_State *L)
{
    lslua_most(L, 0);
    lua_pushstring(L, lstub_version());
    return 1;
}

static int abi(lua_State *L)
{
    lslua_most(L, 0);
    lua_pushinteger(L, lstub_abi());
    return 1;
}

static int model_revision(lua_State *L)
{
    lslua_most(L, 0);
    lua_pushinteger(L, lstub_model_revision());
    return 1;
}

static int status_name(lua_State *L)
{
    lua_Integer status = lslua_whole(L, 1);
    lslua_most(L, 1);
    luaL_argcheck(L, status >= INT32_MIN && status <= INT32_MAX, 1, "not a status");
    lua_pushstring(L, lstub_status_name((int32_t)status));
    return 1;
}

/* ---- units ---- */

static int scaled(lua_State *L, double factor)
{
    luaL_checktype(L, 1, LUA_TNUMBER);
    lslua_most(L, 1);
    lua_pushnumber(L, (double)lua_tonumber(L, 1) * factor);
    return 1;
}

static int mil(lua_State *L) { return scaled(L, 25.4e-6); }
static int mm(lua_State *L) { return scaled(L, 1e-3); }
static int um(lua_State *L) { return scaled(L, 1e-6); }
static int inch(lua_State *L) { return scaled(L, 25.4e-3); }
static int ghz(lua_State *L) { return scaled(L, 1e9); }
static int gbd(lua_State *L) { return scaled(L, 1e9); }

static const luaL_Reg functions[] = {
    {"version", version}, {"abi", abi}, {"model_revision", model_revision}, {"status_name", status_name},
    {"mil", mil}, {"mm", mm}, {"um", um}, {"inch", inch}, {"ghz", ghz}, {"gbd", gbd},
    {"array", lslua_array_new}, {"complex", lslua_complex_new}, {"linspace", lslua_linspace},
    {"dielectric_permittivity", lslua_dielectric_permittivity}, {"trace_line", lslua_trace_line},
    {"conductor_surface_impedance", lslua_conductor_surface_impedance}, {"transition", lslua_transition_new},
    {"remark_text", lslua_remark_text},
    {"stackup", lslua_stackup_new}, {"via", lslua_via_new}, {"first_notch_batch", lslua_first_notch_batch},
    {"signal_nyquist", lslua_signal_nyquist}, {"signal_bit_rate", lslua_signal_bit_rate},
    {"longest_stub", lslua_longest_stub}, {"longest_stub_batch", lslua_longest_stub_batch},
    {"margin_batch", lslua_margin_batch}, {"plan", lslua_plan_new}, {"action_name", lslua_action_name},
    {"reason_name", lslua_reason_name}, {"rules_load", lslua_rules_load}, {"rules_parse", lslua_rules_parse},
    {"board_load", lslua_board_load}, {NULL, NULL}
};

static const lslua_word statuses[] = {
    {"OK", LSTUB_OK}, {"W_RANGE", LSTUB_W_RANGE}, {"W_CAPACITY", LSTUB_W_CAPACITY}, {"E_ARGUMENT", LSTUB_E_ARGUMENT},
    {"E_NULL", LSTUB_E_NULL}, {"E_SIZE", LSTUB_E_SIZE}, {"E_NEWER", LSTUB_E_NEWER}, {"E_MEMORY", LSTUB_E_MEMORY},
    {"E_GEOMETRY", LSTUB_E_GEOMETRY}, {"E_NONE", LSTUB_E_NONE}, {"E_UNSUPPORTED", LSTUB_E_UNSUPPORTED},
    {"E_MIXED", LSTUB_E_MIXED}, {"E_READ", LSTUB_E_READ}, {"E_WRITE", LSTUB_E_WRITE}, {"E_FORMAT", LSTUB_E_FORMAT},
    {NULL, 0}
};

#if defined(_WIN32)
#define EXPORTED __declspec(dllexport)
#elif defined(__GNUC__)
#define EXPORTED __attribute__((visibility("default")))
#else
#define EXPORTED
#endif

EXPORTED int luaopen_libstub(lua_State *L);

int luaopen_libstub(lua_State *L)
{
    size_t i;
    if (lstub_abi() != LSTUB_ABI)
        return luaL_error(L, "the libstub module was built for ABI %d, and the library found, %s, has ABI %d",
                          LSTUB_ABI, lstub_version(), (int)lstub_abi());
    lslua_open_array(L);
    lslua_open_stackup(L);
    lslua_open_via(L);
    lslua_open_model(L);
    lslua_open_transition(L);
    lslua_open_touchstone(L);
    lslua_open_plan(L);
    lslua_open_rules(L);
    lslua_open_board(L);
    luaL_newlib(L, functions);
    luaL_setfuncs(L, lslua_networks, 0);
    luaL_setfuncs(L, lslua_responses, 0);
    luaL_setfuncs(L, lslua_touchstones, 0);
    luaL_setfuncs(L, lslua_measures, 0);
    lslua_open_formulas(L);
    for (i = 0; statuses[i].word != NULL; i++) {
        lua_pushinteger(L, statuses[i].value);
        lua_setfield(L, -2, statuses[i].word);
    }
    return 1;
}
