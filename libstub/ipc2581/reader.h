/*
** What is known while a board is read. Pass 1 collects what the features refer to and the holes; the stackup is laid
** out; pass 2 goes through the features and notes, per hole and copper layer, what it meets; then the vias are made.
**
** How things are settled where a file leaves them open; each leaves a notice where it was not said outright:
** Stackup      The first, or the one asked for. By sequence; by group first where numbers come twice; turned over when
**              the sides of the outer copper say so. Layers that are neither copper nor dielectric (paste, legend), not
**              declared, or dielectrics without thickness are left out. No Dk: the rules' default; without one a
**              coating is left out and anything else refuses the board. A Dk of 1 on copper is a blank form: the core's
**              rule for resin holds. The layers count, not overallThickness.
** Holes        Plated ones of the Step that Content refers to, or of the first that has any; one of two at the same place
**              and with the same span. Without a usable Span: through the board. Pads whose stack defines a plated hole
**              stand for it where there is no Hole.
** Connects     A trace or area of the same net that reaches the pad on that layer, or the barrel where there is no pad; a
**              land that covers the axis, or a pin's that reaches it. A pin with pads on both outer layers connects on its
**              component's side: Component, or a mirrored pad, else the top. Via pads alone connect nothing, nor do those
**              of a neighbour; micro vias whose spans meet do when their pads overlap. On a negative plane: what has no
**              clearance wider than the hole, if any hole on it has one.
** Antipads     Twice the least distance to the cutout that the hole is in, or to an outline that is met in six of eight
**              directions; the nearest of several areas. Copper farther than REACH is no plane at this via. Where nothing
**              is drawn, or copper of another net covers the hole: the pad stack's antipad, the rules' default, or no plane.
**              A conductor layer with such an opening around some via is a mixed one.
** Pads         Not round: the disc of the same area. Not larger than the hole: none. The definition's, where no feature
**              is on the hole.
** Returns      Holes of return nets within the rule's distance that cross all the via's layers: as many of the nearest as
**              have room on one circle, at their geometric mean distance.
** Pairs        The nearest hole of the partner net with the same span within 2.5 mm, if it is mutual; shared when one
**              opening holds both or the antipads overlap, unless the rule says.
** Derived lengths are rounded to 0.1 um.
*/
#ifndef LSTUB_IPC2581_READER_H
#define LSTUB_IPC2581_READER_H

#include "ipc2581/arena.h"
#include "ipc2581/board.h"
#include "ipc2581/grid.h"
#include "ipc2581/notice.h"
#include "ipc2581/rules.h"
#include "ipc2581/shape.h"
#include "ipc2581/xml.h"

/* ---- pass 1 ------------------------------------------------------------------------------------ */

typedef struct reader_spec {       /* a Spec; NaN or -1: not given */
    double  dk, dk_frequency, loss_tangent, conductivity;
    int     is_backdrill;
    int32_t start_layer, must_not_cut;              /* layer numbers */
    double  max_stub, depth, bit;                   /* m */
    int32_t layer_kind;                             /* LSTUB_LAYER_... that it says itself, 0: says nothing */
    int64_t line;
} reader_spec;

typedef struct reader_layer {      /* a layer's name met anywhere; its number is that of the name */
    int     declared, is_drill, negative;
    int32_t side;                  /* LSTUB_SIDE_..., 0 */
    int32_t kind;                  /* LSTUB_LAYER_... by its function; 0: not a layer of a stackup */
    int32_t coating;               /* dielectric that may lie outside only: solder mask and the like */
    int32_t from, to;              /* of its Span: layer numbers, -1: none */
    int32_t spec;
    const char *function;
    int64_t line;
    int32_t stack, copper;         /* place in the stackup, number among its copper layers; -1: not in it */
    int     has_area, has_clear;   /* pass 2: copper areas on it; clearances on it (negative layers) */
} reader_layer;

typedef struct reader_width {
    double width;                  /* m */
    int    raw;                    /* still in units not known */
} reader_width;

enum { FILL_SOLID, FILL_HOLLOW, FILL_VOID };

typedef struct reader_stackup {
    const char *name, *measured;
    double  overall;               /* m; 0: not given */
    int64_t line;
} reader_stackup;

typedef struct reader_stack_layer {
    int32_t stackup, group, layer, spec;
    double  thickness, plus, minus;
    double  sequence;              /* NaN: not given */
    int64_t line;
} reader_stack_layer;

enum { PAD_REGULAR, PAD_ANTIPAD, PAD_THERMAL };

typedef struct reader_padstack {
    double  drill;                 /* 0: no hole */
    int32_t kind;                  /* LSTUB_HOLE_..., 0: not plated */
    int32_t pads;                  /* first of its pads, -1: none */
    int64_t line;
} reader_padstack;

typedef struct reader_padstack_pad {
    int32_t layer, use, next;
    lstub__shape shape;
} reader_padstack_pad;

#define SITE_SPECS 4

typedef struct reader_site {       /* a plated hole */
    double  x, y, drill;
    int64_t line, ordinal;
    const char *name;
    int32_t net, padstack;         /* numbers of names; net 0: none */
    int32_t kind, layer, step;
    int32_t specs[SITE_SPECS], spec_count;
    int32_t first, last;           /* copper numbers */
    size_t  cell;                  /* of its first layer */
    int32_t next_of_net;           /* next hole of the same net, -1 */
    unsigned char side;            /* component side of its pin: LSTUB_SIDE_..., 0: not known */
    unsigned char dead;
} reader_site;

typedef struct reader_bit {        /* a hole that is not plated but carries a Backdrill specification */
    double  x, y, diameter;
    int32_t specs[SITE_SPECS], spec_count, step;
    int64_t line;
} reader_bit;

/* ---- pass 2 ------------------------------------------------------------------------------------ */

#define CELL_PIN     1u            /* a component's pad stands on the hole                             */
#define CELL_COVER   2u            /* copper of its own net covers the hole                            */
#define CELL_SHORT   4u            /* copper of another net covers it                                  */
#define CELL_VOID    8u            /* it stands in an opening of copper: room and slot say which       */
#define CELL_DRAWN  16u            /* negative layer: something is drawn at it, a clearance or not      */

typedef struct reader_cell {       /* what one hole meets on one copper layer of its span; m           */
    double pad, pin_pad;           /* diameter of its own pad; of a component's pad on it              */
    double own;                    /* from the axis to copper of its own net, pads aside               */
    double clear;                  /* from the axis to other copper                                    */
    double room;                   /* radius of the opening it stands in                               */
    double cut;                    /* radius of the clearance drawn at it (negative)                   */
    uint32_t slot;                 /* number of the opening, 0: none                                   */
    unsigned char flags;
} reader_cell;

typedef struct reader_net {        /* what the rules say of a net */
    double  within;                /* > 0: carries the return */
    int32_t partner, pair_kind;    /* net, -1: none */
    int32_t signal;
    int32_t first;                 /* hole, -1 */
} reader_net;

typedef struct reader {
    lstub_board *board;
    const lstub_allocator *alloc;  /* the board's */
    const lstub_rules *rules;
    const lstub_board_options *options;
    lstub_error *err;
    lstub__notices notices;
    struct board_arena *work;      /* gone when the board is read */
    /* pass 1 */
    double  unit, dict_unit;       /* m per unit of the file; of the dictionary at hand */
    lstub__names lines, fills, shapes[2], specs_named, layers_named, nets, padstacks_named, components, steps, implied;
    lstub__list line_widths, fill_kinds, shape_list[2];       /* items numbered as the names; shapes: standard, user */
    lstub__list specs, layers, padstacks, component_sides;
    lstub__list stackups, stack_layers, padstack_pads, sites, bits;
    int32_t entry;                 /* dictionary entry or spec being read, -1: none */
    int32_t shape_kind;
    int32_t layer_entry, stack_entry, group;
    int     property;              /* what a Property means here */
    lstub__shape_builder builder;
    int     building, width_open, dict_raw;
    int32_t step, layer;           /* step and feature layer being read, -1: none */
    int32_t set_net, set_padstack, set_specs[SITE_SPECS], set_spec_count;
    size_t  set_site, set_bit;     /* first hole of the set */
    int32_t pad_use, pad_layer, pad_stack;
    int     padstack_holes, drills;   /* a pad stack has a plated hole; the layer at hand is one of holes */
    int64_t holes_used;
    const char *step_ref;
    double  widest;                /* line, m */
    /* the stackup */
    lstub__list stack, stack_from; /* of lstub_layer; the layer number of each */
    double  left_out;              /* m of layers in it that are none of the board's */
    int32_t *copper_layer;         /* layer number of each copper layer */
    int32_t copper_count;
    /* pass 2 */
    double *x, *y;                 /* of the holes, for the grid */
    lstub__grid grid;
    reader_cell *cells;
    reader_net  *net;
} reader;

enum { BUILDING_ENTRY = 1, BUILDING_PAD };

#define REACH 1.5e-3               /* m: copper farther than this from the axis does not matter         */
#define SAME_PLACE 5e-6            /* m: a pad is on the hole when its middle is                        */

/* reader_dict.c: Content. reader_spec.c: CadHeader. reader_layers.c: layers, stackups. reader_holes.c: the step. Each
** takes what is its own: 1 if it did. */
int  lstub__dict_start(reader *r, lstub__xml *xml, int element, const char **attributes);
void lstub__dict_end(reader *r, lstub__xml *xml, int element);
void lstub__dict_finish(reader *r);
int  lstub__fill_of(const char *property);                       /* FILL_... */
int  lstub__spec_start(reader *r, lstub__xml *xml, int element, const char **attributes);
void lstub__spec_end(reader *r, int element);
int  lstub__layers_start(reader *r, lstub__xml *xml, int element, const char **attributes);
void lstub__layers_end(reader *r, int element);
int  lstub__holes_start(reader *r, lstub__xml *xml, int element, const char **attributes);
void lstub__holes_end(reader *r, lstub__xml *xml, int element);

int32_t lstub__function_kind(const char *function);              /* LSTUB_LAYER_..., 0 */

/* Numbers of names; < 0: a failure, in xml. The item is there when the number is. */
int32_t lstub__layer_number(reader *r, lstub__xml *xml, const char *name);
int32_t lstub__spec_number(reader *r, lstub__xml *xml, const char *name);
/* The shape that a StandardPrimitiveRef or UserPrimitiveRef means; null, noted, where there is none. */
const lstub__shape *lstub__find_shape(reader *r, lstub__xml *xml, int element, const char **attributes);
/* Pad of a pad stack definition on a layer; null where it has none. */
const lstub__shape *lstub__defined_pad(reader *r, int32_t padstack, int32_t layer, int32_t use);
#define LAYER(r, n) LSTUB__ITEM((r)->layers, reader_layer, n)
#define SPEC(r, n) LSTUB__ITEM((r)->specs, reader_spec, n)
#define SITE(r, n) LSTUB__ITEM((r)->sites, reader_site, n)

/* reader_scan.c: pass 1, through the four above. */
int32_t lstub__reader_scan(reader *r, const char *path);

/* reader_stackup.c: chooses the stackup and lays out its layers; later makes it, kinds settled. */
int32_t lstub__reader_lay_out(reader *r);
int32_t lstub__reader_make_stackup(reader *r);
#define STACK(r, n) LSTUB__ITEM((r)->stack, lstub_layer, n)
#define COPPER(r, n) LAYER(r, (r)->copper_layer[n])    /* copper layer number n from the top */

/* reader_sites.c: the holes of the chosen step, once each, with their spans, nets and cells. */
int32_t lstub__reader_settle(reader *r);
/* Calls visit for every hole with its number within `distance` of the point. */
void lstub__reader_around(const reader *r, double x, double y, double distance,
                          void (*visit)(const reader *r, int32_t site, double gap, void *context), void *context);

/* features.c: pass 2, into the cells. */
int32_t lstub__reader_features(reader *r, const char *path);

/* reader_near.c: neighbours: vias on vias, barrels in the bit's way; returns and pairs. reader_drill.c: back-drills. */
void    lstub__reader_barrels(reader *r);
void    lstub__reader_returns(reader *r);
void    lstub__reader_bits(reader *r);
int32_t lstub__reader_backdrills(reader *r, const reader_site *site, lstub_via *via);

/* reader_via.c: cells become vias, checked against the stackup. */
void    lstub__reader_kinds(reader *r);                 /* signal layers with planes at some via: mixed ones */
int32_t lstub__reader_vias(reader *r);
void    lstub__reader_check(reader *r);

double lstub__tidy(double length);       /* to a tenth of a micrometre: what the coordinates are good for */

#endif
