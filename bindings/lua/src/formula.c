/* The closed forms, from one table. */
#include "lslua.h"

#include <string.h>

#define PARAMETERS_MAX 5

typedef struct formula {
    const char *name;
    int32_t   (*call)(const double *in, double *out, lstub_error *err);
    int         results;
    const char *in[PARAMETERS_MAX + 1];    /* C parameter names in the header's order                          */
    const char *whole;                     /* the one that is an integer, or null                              */
} formula;

#define ONE_RESULT(name, ...) \
    static int32_t call_##name(const double *in, double *out, lstub_error *err) { return lstub_##name(__VA_ARGS__); }

ONE_RESULT(quarter_wave_frequency, in[0], in[1], (int32_t)in[2], out, err)
ONE_RESULT(quarter_wave_length, in[0], in[1], (int32_t)in[2], out, err)
ONE_RESULT(quarter_wave_dk, in[0], in[1], (int32_t)in[2], out, err)
ONE_RESULT(delay_dk, in[0], out, err)
ONE_RESULT(loaded_stub_frequency, in[0], in[1], in[2], in[3], (int32_t)in[4], out, err)
ONE_RESULT(notch_floor, in[0], in[1], in[2], (int32_t)in[3], out, err)
ONE_RESULT(stub_skirt, in[0], in[1], in[2], out, err)
ONE_RESULT(rule_of_thumb_length, in[0], out, err)
ONE_RESULT(coax, in[0], in[1], in[2], out, out + 1, out + 2, err)
ONE_RESULT(return_inductance, in[0], (int32_t)in[1], in[2], in[3], out, err)
ONE_RESULT(twin_rod, in[0], in[1], in[2], out, out + 1, err)
ONE_RESULT(plate_capacitance, in[0], in[1], in[2], in[3], in[4], out, err)
ONE_RESULT(handbook_capacitance, in[0], in[1], in[2], in[3], out, err)
ONE_RESULT(handbook_inductance, in[0], in[1], out, err)
ONE_RESULT(skin_depth, in[0], in[1], out, err)
ONE_RESULT(fit_effective_dk, in[0], in[1], in[2], in[3], (int32_t)in[4], out, out + 1, err)
ONE_RESULT(fit_length, in[0], in[1], in[2], in[3], (int32_t)in[4], out, out + 1, err)

static const formula formulas[] = {
    {"quarter_wave_frequency", call_quarter_wave_frequency, 1, {"length", "dk", "n"}, "n"},
    {"quarter_wave_length", call_quarter_wave_length, 1, {"f", "dk", "n"}, "n"},
    {"quarter_wave_dk", call_quarter_wave_dk, 1, {"f", "length", "n"}, "n"},
    {"delay_dk", call_delay_dk, 1, {"delay"}, NULL},
    {"loaded_stub_frequency", call_loaded_stub_frequency, 1, {"length", "dk", "zs", "end_capacitance", "n"}, "n"},
    {"notch_floor", call_notch_floor, 1, {"zs", "z0", "loss_tangent", "n"}, "n"},
    {"stub_skirt", call_stub_skirt, 1, {"zs", "z0", "f_over_f1"}, NULL},
    {"rule_of_thumb_length", call_rule_of_thumb_length, 1, {"bit_rate"}, NULL},
    {"coax", call_coax, 3, {"inner_diameter", "outer_diameter", "dk"}, NULL},
    {"return_inductance", call_return_inductance, 1, {"drill", "count", "distance", "return_drill"}, "count"},
    {"twin_rod", call_twin_rod, 2, {"drill", "pitch", "dk"}, NULL},
    {"plate_capacitance", call_plate_capacitance, 1,
     {"drill", "antipad", "spacing", "dk_through_plane", "dk_in_plane"}, NULL},
    {"handbook_capacitance", call_handbook_capacitance, 1, {"thickness", "pad", "antipad", "dk"}, NULL},
    {"handbook_inductance", call_handbook_inductance, 1, {"length", "diameter"}, NULL},
    {"skin_depth", call_skin_depth, 1, {"conductivity", "f"}, NULL},
    {"fit_effective_dk", call_fit_effective_dk, 2, {"f", "f_sigma", "length", "length_sigma", "n"}, "n"},
    {"fit_length", call_fit_length, 2, {"f", "f_sigma", "dk", "dk_sigma", "n"}, "n"},
};

static void read_table(lua_State *L, const formula *f, double *in)
{
    lslua_at at = lslua_options(L, 1, f->in);
    int i;
    lslua_most(L, 1);
    for (i = 0; f->in[i] != NULL; i++) {
        int32_t n = 0;
        if (f->whole != NULL && strcmp(f->in[i], f->whole) == 0) {
            lslua_need(&at, f->in[i], lslua_integer(&at, f->in[i], &n));
            in[i] = n;
        } else
            lslua_need(&at, f->in[i], lslua_number(&at, f->in[i], &in[i]));
    }
}

static void read_arguments(lua_State *L, const formula *f, double *in)
{
    int i;
    for (i = 0; f->in[i] != NULL; i++) {
        luaL_checktype(L, i + 1, LUA_TNUMBER);
        in[i] = (double)lua_tonumber(L, i + 1);
        if (f->whole != NULL && strcmp(f->in[i], f->whole) == 0) {
            lua_Integer n = lslua_whole(L, i + 1);
            luaL_argcheck(L, n >= INT32_MIN && n <= INT32_MAX, i + 1, "number has no 32-bit integer representation");
            in[i] = (double)n;
        }
    }
    lslua_most(L, i);
}

/* name(a, b, c) or name{a = , b = , c = }. */
static int formula_call(lua_State *L)
{
    const formula *f = &formulas[lua_tointeger(L, lua_upvalueindex(1))];
    double in[PARAMETERS_MAX], out[3];
    lstub_error err;
    int32_t status;
    int i;
    LSTUB_INIT(err);
    if (lua_istable(L, 1))
        read_table(L, f, in);
    else
        read_arguments(L, f, in);
    status = f->call(in, out, &err);
    if (status < 0)
        return lslua_fail(L, status, &err);
    for (i = 0; i < f->results; i++)
        lua_pushnumber(L, out[i]);
    return lslua_done(L, f->results, status, &err);
}

void lslua_open_formulas(lua_State *L)
{
    size_t i;
    for (i = 0; i < sizeof formulas / sizeof formulas[0]; i++) {
        lua_pushinteger(L, (lua_Integer)i);
        lua_pushcclosure(L, formula_call, 1);
        lua_setfield(L, -2, formulas[i].name);
    }
}
