/* One pass over a board file, plain or gzip: known elements to two handlers, limits kept, failures with their line. */
#ifndef LSTUB_IPC2581_XML_H
#define LSTUB_IPC2581_XML_H

#include "base/base.h"
#include "libstub_ipc2581.h"

/* The elements the reader knows, in the order of strcmp: constant, then the name in the file. */
#define LSTUB__ELEMENTS(E) \
    E(ARC, "Arc") E(BACKDRILL, "Backdrill") E(BUTTERFLY, "Butterfly") E(CAD_DATA, "CadData") E(CAD_HEADER, "CadHeader") E(CIRCLE, "Circle") \
    E(COMPONENT, "Component") E(CONDUCTOR, "Conductor") E(CONTENT, "Content") E(CONTOUR, "Contour") E(CUTOUT, "Cutout") \
    E(DIAMOND, "Diamond") E(DICT_FILL, "DictionaryFillDesc") E(DICT_LINE, "DictionaryLineDesc") \
    E(DICT_STANDARD, "DictionaryStandard") E(DICT_USER, "DictionaryUser") E(DIELECTRIC, "Dielectric") E(DONUT, "Donut") E(ECAD, "Ecad") \
    E(ELLIPSE, "Ellipse") E(ENTRY_FILL, "EntryFillDesc") E(ENTRY_LINE, "EntryLineDesc") E(ENTRY_STANDARD, "EntryStandard") \
    E(ENTRY_USER, "EntryUser") E(FEATURES, "Features") E(FILL_DESC, "FillDesc") E(FILL_REF, "FillDescRef") E(GENERAL, "General") \
    E(HEXAGON, "Hexagon") E(HOLE, "Hole") E(IPC_2581, "IPC-2581") E(LAYER, "Layer") E(LAYER_FEATURE, "LayerFeature") \
    E(LINE, "Line") E(LINE_DESC, "LineDesc") E(LINE_REF, "LineDescRef") E(LOCATION, "Location") E(MOIRE, "Moire") \
    E(OCTAGON, "Octagon") E(OUTLINE, "Outline") E(OVAL, "Oval") E(PAD, "Pad") E(PAD_STACK_DEF, "PadStackDef") \
    E(PAD_HOLE_DEF, "PadstackHoleDef") E(PAD_PAD_DEF, "PadstackPadDef") E(PIN_REF, "PinRef") E(POLY_BEGIN, "PolyBegin") \
    E(POLY_CURVE, "PolyStepCurve") E(POLY_SEGMENT, "PolyStepSegment") E(POLYGON, "Polygon") E(POLYLINE, "Polyline") \
    E(PROPERTY, "Property") E(RECT_CENTER, "RectCenter") E(RECT_CHAM, "RectCham") E(RECT_CORNER, "RectCorner") \
    E(RECT_ROUND, "RectRound") E(SET, "Set") E(SLOT_CAVITY, "SlotCavity") E(SPAN, "Span") E(SPEC, "Spec") \
    E(SPEC_REF, "SpecRef") E(STACKUP, "Stackup") E(STACKUP_GROUP, "StackupGroup") E(STACKUP_LAYER, "StackupLayer") \
    E(STANDARD_REF, "StandardPrimitiveRef") E(STEP, "Step") E(STEP_REF, "StepRef") E(STEP_REPEAT, "StepRepeat") \
    E(THERMAL, "Thermal") E(TRIANGLE, "Triangle") E(USER_REF, "UserPrimitiveRef") E(USER_SPECIAL, "UserSpecial") \
    E(XFORM, "Xform")

enum {
    EL_OTHER,              /* any other element: seen by nobody but on the path */
#define E(constant, name) EL_##constant,
    LSTUB__ELEMENTS(E)
#undef E
    EL_COUNT
};

#define LSTUB__DEPTH_MAX 64           /* open elements                       */
#define LSTUB__TEXT_MAX  65536        /* bytes of a name or an attribute     */
#define LSTUB__TOKEN_MAX 262144       /* bytes of a whole tag or comment     */

typedef struct lstub__xml lstub__xml;
struct lstub__xml {
    /* set by the caller, the rest zero */
    void (*start)(lstub__xml *xml, int element, const char **attributes);
    void (*end)(lstub__xml *xml, int element);
    void  *user;
    lstub_error *err;
    int32_t (*progress)(void *user, double fraction);    /* null: none */
    void  *progress_user;
    double progress_from, progress_to;
    /* for the handlers */
    int     depth;                              /* open elements, the current one counted         */
    unsigned char path[LSTUB__DEPTH_MAX];       /* path[depth - 1] is the current one             */
    int64_t holes;                              /* Hole elements before the current element       */
    int32_t status;                             /* < 0: failed, nothing more is reported          */
    /* the result */
    uint32_t crc;
    int64_t  bytes;                             /* unpacked */
    /* inside */
    void *parser;
    int   skip;                                 /* depth of the element whose content is skipped, or 0 */
};

/* Reads the file once. A status < 0 with err filled, or LSTUB_OK. Expat and zlib use malloc. */
int32_t lstub__xml_read(lstub__xml *xml, const char *path);

/* Inside a handler: the rest of the current element is of no interest; only its end is reported. */
void    lstub__xml_skip(lstub__xml *xml);
int64_t lstub__xml_line(const lstub__xml *xml);
/* Element `up` levels above the current one (0: itself), EL_OTHER beyond the root. */
int     lstub__xml_above(const lstub__xml *xml, int up);
/* Gives up: the message gets "line N: " before it. */
void    lstub__xml_fail(lstub__xml *xml, int32_t status, const char *field, const char *format, ...)
    LSTUB_PRINTF(4, 5);
/* An error that err holds already, of an allocation for instance. */
void    lstub__xml_stop(lstub__xml *xml, int32_t status);

/* Attributes: null where missing. */
const char *lstub__xml_get(const char **attributes, const char *name);
const char *lstub__xml_text(const char **attributes, const char *name);                 /* "" where missing */
int         lstub__xml_is(const char **attributes, const char *name, const char *value);
/*
** Numbers: 1, or 0 after a failure that names element, attribute and text. A missing one is a failure, or leaves
** *value as it is. A length is multiplied by `unit` and must lie within 100 m.
*/
int lstub__xml_number(lstub__xml *xml, const char **attributes, const char *name, double *value);
int lstub__xml_optional(lstub__xml *xml, const char **attributes, const char *name, double *value);
int lstub__xml_length(lstub__xml *xml, const char **attributes, const char *name, double unit, double *value);
int lstub__xml_optional_length(lstub__xml *xml, const char **attributes, const char *name, double unit, double *value);

#endif
