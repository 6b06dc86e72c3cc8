/* What the two files of libstub.via share. */
#ifndef LSLUA_VIA_H
#define LSLUA_VIA_H

#include "lslua.h"

/* User values of a via: its stackup, and its arrays. */
enum { VALUE_STACKUP = 1, VALUE_PADS, VALUE_ANTIPADS, VALUE_CLEAR, VALUE_CONNECTS, VALUE_BACKDRILLS, VALUE_RETURNS,
       VALUE_SPANS, VALUE_PARTNER, VALUE_COUNT = VALUE_PARTNER };

extern const lslua_word lslua_pad_words[];        /* removed, kept */
extern const char *const lslua_edge_sides[4];     /* of the planes, in the order of lstub_via.edges */

/* Pushes an empty via on the stackup at `stackup`. */
lslua_via *lslua_push_new_via(lua_State *L, int stackup);
/* Scratch that belongs to the via at `via`, as that user value. */
void *lslua_via_array(lua_State *L, int via, int value, size_t count, size_t size);

#endif
