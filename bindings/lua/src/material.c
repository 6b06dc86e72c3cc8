/* Dielectrics, conductors and traces: tables in, curves over frequency out. */
#include "lslua.h"

const lslua_word lslua_roughness_laws[] = {
    {"hammerstad", LSTUB_ROUGHNESS_HAMMERSTAD}, {"spheres", LSTUB_ROUGHNESS_SPHERES}, {NULL, 0}
};
static const lslua_word trace_kinds[] = {
    {"microstrip", LSTUB_TRACE_MICROSTRIP}, {"stripline", LSTUB_TRACE_STRIPLINE}, {NULL, 0}
};

static const char *const dielectric_keys[] = {"dk", "in_plane_ratio", "loss_tangent", "f_ref", NULL};
static const char *const conductor_keys[] = {"conductivity", "roughness", "roughness_law", NULL};
static const char *const trace_keys[] = {
    "kind", "width", "thickness", "height_below", "height_above", "dielectric_below", "dielectric_above", "conductor",
    "no_dispersion", NULL
};

/* ---- tables ---- */

static void read_dielectric(const lslua_at *at, lstub_dielectric *to)
{
    LSTUB_INIT(*to);
    lslua_check_keys(at, dielectric_keys);
    lslua_need(at, "dk", lslua_number(at, "dk", &to->dk));
    lslua_number(at, "in_plane_ratio", &to->in_plane_ratio);
    lslua_number(at, "loss_tangent", &to->loss_tangent);
    lslua_number(at, "f_ref", &to->f_ref);
}

int lslua_read_conductor(const lslua_at *at, lstub_conductor *to)
{
    LSTUB_INIT(*to);
    return lslua_number(at, "conductivity", &to->conductivity) | lslua_number(at, "roughness", &to->roughness)
           | lslua_word_field(at, "roughness_law", lslua_roughness_laws, &to->roughness_law);
}

void lslua_read_trace(const lslua_at *at, lslua_trace *to)
{
    lstub_trace *trace = &to->trace;
    lslua_at inner;
    LSTUB_INIT(*trace);
    lslua_check_keys(at, trace_keys);
    lslua_need(at, "kind", lslua_word_field(at, "kind", trace_kinds, &trace->kind));
    lslua_need(at, "width", lslua_number(at, "width", &trace->width));
    lslua_number(at, "thickness", &trace->thickness);
    lslua_need(at, "height_below", lslua_number(at, "height_below", &trace->height_below));
    lslua_number(at, "height_above", &trace->height_above);
    lslua_boolean(at, "no_dispersion", &trace->no_dispersion);
    lslua_need(at, "dielectric_below", lslua_table(at, "dielectric_below", &inner));
    read_dielectric(&inner, &to->below);
    trace->dielectric_below = &to->below;
    lua_pop(at->L, 1);
    if (lslua_table(at, "dielectric_above", &inner)) {
        read_dielectric(&inner, &to->above);
        trace->dielectric_above = &to->above;
        lua_pop(at->L, 1);
    }
    if (lslua_table(at, "conductor", &inner)) {
        lslua_check_keys(&inner, conductor_keys);
        lslua_read_conductor(&inner, &to->conductor);
        trace->conductor = &to->conductor;
        lua_pop(at->L, 1);
    }
}

/* ---- over frequency ---- */

typedef int32_t over_frequency(const void *what, const double *freq, size_t n, double *one, double *two, lstub_error *err);

/* One or two complex arrays for the frequencies at argument 2, or their numbers for one frequency. */
static int curves(lua_State *L, over_frequency *call, const void *what, int arrays)
{
    lslua_at list = {0};
    double one, z[4] = {0.0}, *first = z, *second = z + 2;
    const double *freq = &one;
    size_t n = 1;
    lstub_error err;
    int32_t status;
    int scalar = lua_type(L, 2) == LUA_TNUMBER, i;
    LSTUB_INIT(err);
    list.L = L;
    list.arg = 2;
    if (scalar)
        one = (double)lua_tonumber(L, 2);
    else {
        freq = lslua_numbers(L, &list, NULL, 2, &n);
        first = lslua_push_complex(L, n, 1);
        if (arrays == 2)
            second = lslua_push_complex(L, n, 1);
    }
    status = call(what, freq, n, first, second, &err);
    if (status < 0)
        return lslua_fail(L, status, &err);
    for (i = 0; scalar && i < 2 * arrays; i++)
        lua_pushnumber(L, z[i]);
    return lslua_done(L, scalar ? 2 * arrays : arrays, status, &err);
}

static int32_t permittivity(const void *what, const double *freq, size_t n, double *one, double *two, lstub_error *err)
{
    return lstub_dielectric_permittivity(what, freq, n, one, two, err);
}

/* dielectric_permittivity(dielectric, freq): through-plane and in-plane. */
int lslua_dielectric_permittivity(lua_State *L)
{
    lslua_at at = lslua_options(L, 1, dielectric_keys);
    lstub_dielectric dielectric;
    lslua_most(L, 2);
    read_dielectric(&at, &dielectric);
    return curves(L, permittivity, &dielectric, 2);
}

static int32_t surface_impedance(const void *what, const double *freq, size_t n, double *one, double *two, lstub_error *err)
{
    (void)two;
    return lstub_conductor_surface_impedance(what, freq, n, one, err);
}

/* conductor_surface_impedance(conductor, freq) */
int lslua_conductor_surface_impedance(lua_State *L)
{
    lslua_at at = lslua_options(L, 1, conductor_keys);
    lstub_conductor conductor;
    lslua_most(L, 2);
    lslua_read_conductor(&at, &conductor);
    return curves(L, surface_impedance, &conductor, 1);
}

static int32_t line(const void *what, const double *freq, size_t n, double *one, double *two, lstub_error *err)
{
    return lstub_trace_line(what, freq, n, one, two, err);
}

/* trace_line(trace, freq): impedance and propagation constant. */
int lslua_trace_line(lua_State *L)
{
    lslua_at at = lslua_options(L, 1, trace_keys);
    lslua_trace trace;
    lslua_most(L, 2);
    lslua_read_trace(&at, &trace);
    return curves(L, line, &trace.trace, 2);
}
