/* A via turned into what the closed-form fidelities need: capacitance along its barrel, cut anywhere. */
#ifndef LSTUB_SITE_H
#define LSTUB_SITE_H

#include "model/line.h"
#include "via/via.h"

typedef struct lstub__part {      /* one layer beyond the exit                                            */
    double from, to;              /* m from the exit layer's face, outwards                               */
    double c_constant, c_slope;   /* F/m of barrel                                                        */
    double pad_constant, pad_slope; /* F, of a pad on this layer; there when the barrel passes its middle */
    double in_plane, through_plane; /* Dk at 1 GHz                                                        */
    double plane;                 /* antipad of a plane on this layer, m; 0: none                         */
} lstub__part;

typedef struct lstub__arm {       /* the barrel on one side of the layers that connect                    */
    int     count;                /* parts; 0: none on this side                                          */
    double  full;                 /* m, exit face to the end of the barrel before any back-drill          */
    double  length;               /* m, as it is now                                                      */
    double  end_full, end_cut;    /* F at the open end: of the whole barrel, of a drilled one             */
    double  f_range;              /* Hz                                                                   */
    int     lossless;
    lstub__part part[LSTUB_LAYERS_MAX];
} lstub__arm;

typedef struct lstub__site {
    lstub__via via;
    lstub_allocator alloc;         /* of what its branches need                                           */
    int32_t fidelity, annuli;
    double  z_ref;
    double  bit;                   /* m, diameter of a drill that is only thought of                      */
    double  inductance, radial_dk; /* as in lstub__line                                                   */
    double  bulk_antipad;          /* of the bulk fidelity's coaxial impedance, m                         */
    lstub__arm arm[2];             /* top, bottom                                                         */
} lstub__site;

int32_t lstub__options_take(lstub_model_options *ours, const lstub_model_options *theirs, lstub_error *err);
/* For stubs: refuses a pair whose barrels differ. */
int32_t lstub__site_make(lstub__site *site, const lstub_stackup *stackup, const lstub_via *via,
                         const lstub_model_options *options, lstub_error *err);
/* For transitions. */
int32_t lstub__site_any(lstub__site *site, const lstub_stackup *stackup, const lstub_via *via,
                        const lstub_model_options *options, lstub_error *err);
/* The stub on a side cut to `length` (0 < length <= full; full: not drilled). */
void    lstub__site_line(const lstub__site *site, int arm, double length, lstub__line *line);

/* Round antipad that acts like a slot around the pair in odd (sign -1) or even mode; height: of the space beside the plane. */
double  lstub__slot_antipad(const lstub_via *via, double antipad, double height, double sign);

static inline int     lstub__arm_of(int32_t side) { return side == LSTUB_SIDE_TOP ? 0 : 1; }
static inline int32_t lstub__side_of(int arm) { return arm == 0 ? LSTUB_SIDE_TOP : LSTUB_SIDE_BOTTOM; }

#endif
