/*
** What the files of the Lua module share. Three rules hold everywhere:
**
** 1. Memory that must survive a Lua call lives in userdata: a handle's userdata exists before the handle, scratch is
**    a userdata on the stack. So an error may leave at any Lua call and nothing leaks.
** 2. A handle is fetched right before the library call that uses it: any Lua call may run a finalizer, and that may
**    close the object.
** 3. Option tables are read raw, so no metamethod of the caller runs in between.
*/
#ifndef LSLUA_H
#define LSLUA_H

#include <lauxlib.h>
#include <lua.h>

#include "libstub.h"
#include "libstub_ipc2581.h"

/* Keys of the metatables in the registry, and what messages call the objects. */
#define LSLUA_ARRAY   "libstub.array"
#define LSLUA_COMPLEX "libstub.complex"
#define LSLUA_STACKUP "libstub.stackup"
#define LSLUA_VIA     "libstub.via"
#define LSLUA_MODEL   "libstub.model"
#define LSLUA_TRANSITION "libstub.transition"
#define LSLUA_TOUCHSTONE "libstub.touchstone"
#define LSLUA_PLAN    "libstub.plan"
#define LSLUA_RULES   "libstub.rules"
#define LSLUA_BOARD   "libstub.board"

/* ---- errors and results (report.c) ---- */

/* nil, message, code; raises what only this module can have done wrong, and lack of memory. */
int lslua_fail(lua_State *L, int32_t status, const lstub_error *err);
/* The `results` on top of the stack, and message and code behind them where status is a warning. */
int lslua_done(lua_State *L, int results, int32_t status, const lstub_error *err);
/* Fills err with a failure that this module has found itself. */
int32_t lslua_refuse(lstub_error *err, int32_t status, const char *format, ...);
/* Statuses of the items of a batch, pushed: INT_MIN where the library has not put one. */
int32_t *lslua_new_status(lua_State *L, size_t count);
/* Whether a batch did not answer any item. Raises where memory was lacking. */
int lslua_batch_failed(lua_State *L, int32_t status, const int32_t *each, size_t count);
/*
** The `results` on top of the stack of a call that answers item by item; where not all is well, message, code and the
** list of statuses behind them; nil, message, code where no item came out.
*/
int lslua_items(lua_State *L, int results, int32_t status, const int32_t *each, size_t count, const lstub_error *err);
/* Checks that no argument stands beyond number `most`. */
void lslua_most(lua_State *L, int most);

/* Set a field of the table on top of the stack. NaN, null and the index -1 leave it absent. */
void lslua_set_number(lua_State *L, const char *key, double value);
void lslua_set_integer(lua_State *L, const char *key, int64_t value);
void lslua_set_boolean(lua_State *L, const char *key, int value);
void lslua_set_string(lua_State *L, const char *key, const char *value);
void lslua_set_layer(lua_State *L, const char *key, int names, int32_t layer);  /* names: stack index of the names */

/* ---- memory and handles (handle.c) ---- */

typedef struct lslua_object {   /* the userdata of a handle                                            */
    lua_State *main;            /* its allocator serves the handle too                                 */
    size_t     bytes;           /* allocated for the handle                                            */
    void      *handle;          /* null: closed                                                        */
    const struct lslua_object *owner;  /* the handle is borrowed from this object, a user value of ours */
    int        busy;            /* the library is inside a call that runs Lua code: must not be closed */
} lslua_object;

/* Pushes scratch memory, zeroed. */
void *lslua_scratch(lua_State *L, size_t count, size_t size);
/* Pushes an object without a handle and with its metatable; allocator serves lstub_..._create. */
lslua_object *lslua_new(lua_State *L, const char *type, int values, lstub_allocator *allocator);
/* The state's allocator for what a call needs while it runs; lives as long as the state. */
const lstub_allocator *lslua_allocator(lua_State *L);
/* Tells the collector about the memory behind a new handle. */
void lslua_charge(lua_State *L, const lslua_object *object);
/* The handle of the object at `index`, an argument (arg > 0) or not; raises "closed ...". */
void *lslua_handle(lua_State *L, int index, int arg, const char *type);
/* Body of close, __close and __gc. */
int lslua_close(lua_State *L, const char *type, void (*destroy)(void *handle));
/* Registers a type: methods in __index, the metamethods as given, destroy functions under three names. */
void lslua_type(lua_State *L, const char *type, const luaL_Reg *methods, lua_CFunction close, lua_CFunction tostring,
                lua_CFunction length);

/* ---- option tables (option.c) ---- */

typedef struct lslua_at {       /* where a table stands among the arguments: "jobs[3].signal"          */
    lua_State  *L;
    int         arg;            /* number of the argument                                              */
    int         table;          /* stack index, absolute                                               */
    const char *list;           /* the list it is an item of, or null                                  */
    lua_Integer item;
    const char *within;         /* the member that holds the member below, or null                     */
    const char *member;         /* the member it is, or null                                           */
} lslua_at;

typedef struct lslua_word {     /* a C constant's name in Lua; lists end with a null                   */
    const char *word;
    int32_t     value;
} lslua_word;

/* The table at argument `arg`, its keys checked against the null-ended list. */
lslua_at lslua_options(lua_State *L, int arg, const char *const *keys);
void lslua_check_keys(const lslua_at *at, const char *const *keys);
/* Raises "list[item].member.key: ..."; key may be null. */
int lslua_complain(const lslua_at *at, const char *key, const char *format, ...);
int lslua_wrong_type(const lslua_at *at, const char *key, const char *expected, int index);

/* Pushes the value under `key`, and says whether it is there. */
int lslua_field(const lslua_at *at, const char *key);
/* Read a field, say whether it was there; raise for another type. `need`: raise where it is missing. */
int lslua_number(const lslua_at *at, const char *key, double *value);
int lslua_integer(const lslua_at *at, const char *key, int32_t *value);
int lslua_boolean(const lslua_at *at, const char *key, int32_t *value);
/* A port counted from 1, as one from 0; beyond `ports`: err is filled. */
int lslua_port(const lslua_at *at, const char *key, int32_t ports, int32_t *port, lstub_error *err);
int lslua_word_field(const lslua_at *at, const char *key, const lslua_word *words, int32_t *value);
void lslua_need(const lslua_at *at, const char *key, int found);
/* Pushes the field, which must be a table, and gives its place. */
int lslua_table(const lslua_at *at, const char *key, lslua_at *inner);
/* The string at the stack index, without zero bytes; raises with `at` and key. */
const char *lslua_text(const lslua_at *at, const char *key, int index);
const char *lslua_path(lua_State *L, int arg);
int32_t lslua_word_at(const lslua_at *at, const char *key, const lslua_word *words, int index);
const char *lslua_word_of(const lslua_word *words, int32_t value);
/* The integer at argument `arg`; a string is none. */
lua_Integer lslua_whole(lua_State *L, int arg);
/* A number counted from 1 at argument `arg`, as an index from 0; 0 and a filled err if beyond count. */
int lslua_item(lua_State *L, int arg, const char *what, int64_t count, int64_t *index, lstub_error *err);

/* ---- arrays (array.c) ---- */

void lslua_open_array(lua_State *L);
int lslua_array_new(lua_State *L);       /* ls.array     */
int lslua_complex_new(lua_State *L);     /* ls.complex   */
int lslua_linspace(lua_State *L);        /* ls.linspace  */
/* Pushed, zeroed. ports: 1, a list, or that of matrices. */
double *lslua_push_array(lua_State *L, size_t count);
double *lslua_push_complex(lua_State *L, size_t count, int32_t ports);
/* Numbers in an array or a table; those of a table are copied to scratch, which is left on the stack. */
const double *lslua_numbers(lua_State *L, const lslua_at *at, const char *key, int index, size_t *count);
/* The complex array at `index`; raises where it is none. */
const double *lslua_complex(lua_State *L, const lslua_at *at, const char *key, int index, size_t *count, int32_t *ports);
void lslua_push_status(lua_State *L, const int32_t *status, size_t count);

/* ---- formulas (formula.c) ---- */

void lslua_open_formulas(lua_State *L);  /* into the table on top */

/* ---- dielectrics, conductors and traces (material.c) ---- */

extern const lslua_word lslua_roughness_laws[];      /* hammerstad, spheres */
/* Whether any of its members was there. */
int lslua_read_conductor(const lslua_at *at, lstub_conductor *conductor);

typedef struct lslua_trace {    /* and what it points to                                               */
    lstub_trace      trace;
    lstub_dielectric below, above;
    lstub_conductor  conductor;
} lslua_trace;

void lslua_read_trace(const lslua_at *at, lslua_trace *trace);
int lslua_dielectric_permittivity(lua_State *L);
int lslua_conductor_surface_impedance(lua_State *L);
int lslua_trace_line(lua_State *L);

/* ---- networks (network.c), over time (response.c) ---- */

typedef struct lslua_network {  /* an argument: n matrices of p ports                                  */
    const double *s;
    size_t  n;
    int32_t p;
} lslua_network;

lslua_network lslua_check_network(lua_State *L, int arg);
/* The list of numbers at argument `arg`, which are to be `count`; pushes scratch for those of a table. */
const double *lslua_column(lua_State *L, int arg, const char *what, size_t count);
extern const luaL_Reg lslua_networks[];
extern const luaL_Reg lslua_responses[];

/* ---- touchstone.c and touchstone_data.c ---- */

void lslua_open_touchstone(lua_State *L);
extern const luaL_Reg lslua_touchstones[];
/* Pushes the data of the file at stack index `file`, copied; the number of results. */
int lslua_push_touchstone_data(lua_State *L, int file);
/* The data in the table at argument `arg`; pushes what they point to. */
void lslua_read_touchstone_data(lua_State *L, int arg, lstub_touchstone_data *data);

/* ---- measure.c ---- */

/* Pushes the list of the words whose bits are in the sum. */
void lslua_push_flags(lua_State *L, const lslua_word *words, int32_t sum);
extern const luaL_Reg lslua_measures[];

/* ---- transition.c ---- */

void lslua_open_transition(lua_State *L);
int lslua_transition_new(lua_State *L);
int lslua_remark_text(lua_State *L);

/* ---- stackup.c ---- */

void lslua_open_stackup(lua_State *L);
int lslua_stackup_new(lua_State *L);
/* A stackup without a handle yet; when it has one and is on top, its names are to be listed. */
lslua_object *lslua_push_stackup(lua_State *L, lstub_allocator *allocator);
void lslua_fill_names(lua_State *L);
const lstub_stackup *lslua_stackup(lua_State *L, int index, int arg);
/* A stackup that belongs to the object at `owner`; pushed. */
void lslua_push_borrowed_stackup(lua_State *L, const lstub_stackup *stackup, int owner);
/* Pushes the list of layer names of the stackup at `index`. */
void lslua_push_names(lua_State *L, int index);
extern const lslua_word lslua_sides[];        /* top, bottom */
extern const lslua_word lslua_all_sides[];    /* top, bottom, both */
/* The layer named, or numbered from 1, by the value at `value`. A type of its own raises; no such layer: status. */
int32_t lslua_layer(const lslua_at *at, const char *key, int stackup, int value, int32_t *layer, lstub_error *err);

/* ---- via.c ---- */

typedef struct lslua_via {
    lstub_via via;              /* its arrays are user values 2 and up, its stackup user value 1       */
    int       closed;
} lslua_via;

void lslua_open_via(lua_State *L);
int lslua_via_new(lua_State *L);
/* The via at `index`; raises for a closed one. */
lslua_via *lslua_check_via(lua_State *L, int index);
/* Pushes a copy of a via that lives elsewhere, on the stackup at `stackup`. */
void lslua_push_via(lua_State *L, const lstub_via *via, int stackup);
void lslua_push_stub(lua_State *L, const lstub_stub *stub, int names);
/*
** The vias of a list, copied one after the other, all on the stackup at `stackup`. Pushes two values that keep them
** and what they point to.
*/
lstub_via *lslua_vias(lua_State *L, int arg, int stackup, size_t *count);

/* ---- model.c ---- */

void lslua_open_model(lua_State *L);
int lslua_via_model(lua_State *L);
void lslua_model_defaults(lua_State *L, lstub_model_options *options);
void lslua_model_options(const lslua_at *at, lstub_model_options *options);
/* Options of the model at argument `arg`, which may be none. */
void lslua_model_argument(lua_State *L, int arg, lstub_model_options *options);
int lslua_first_notch_batch(lua_State *L);
void lslua_push_notches(lua_State *L, const lstub_notch *notches, size_t count);

/* ---- criteria.c ---- */

void lslua_read_signal(const lslua_at *at, lstub_signal *signal);
void lslua_read_criteria(const lslua_at *at, lstub_criteria *criteria);
void lslua_push_signal(lua_State *L, const lstub_signal *signal);
void lslua_push_criteria(lua_State *L, const lstub_criteria *criteria);
void lslua_push_margin(lua_State *L, const lstub_margin *margin);
int lslua_signal_nyquist(lua_State *L);
int lslua_signal_bit_rate(lua_State *L);
int lslua_model_margin(lua_State *L);
int lslua_highest_symbol_rate(lua_State *L);
int lslua_longest_stub(lua_State *L);
int lslua_longest_stub_batch(lua_State *L);
int lslua_margin_batch(lua_State *L);

/* ---- plan.c and capability.c ---- */

void lslua_open_plan(lua_State *L);
int lslua_plan_new(lua_State *L);
int lslua_action_name(lua_State *L);
int lslua_reason_name(lua_State *L);
/* Pushes scratch for the depths, and perhaps more. */
void lslua_read_capability(lua_State *L, int arg, lstub_capability *capability);
void lslua_push_capability(lua_State *L, const lstub_capability *capability);

/* ---- rules.c and board.c ---- */

void lslua_open_rules(lua_State *L);
int lslua_rules_load(lua_State *L);
int lslua_rules_parse(lua_State *L);
void lslua_open_board(lua_State *L);
int lslua_board_load(lua_State *L);

#endif
