/* The reader of boards: what it makes of the copper: planes and antipads, connections, neighbours. */
#define BOARD_FILE "check_copper.xml"
#include "check_ipc2581.h"

static lstub_error err;

/* ---- planes ------------------------------------------------------------------------------------- */

static lstub_board *plane_board(test_xml *b, const char *ground, const char *rules)
{
    static char copper[8192];
    snprintf(copper, sizeof copper, "%s<LayerFeature layerRef=\"GND\">%s</LayerFeature>", ON("TOP", TRACE("S", "2", "5", "5", "5")), ground);
    b->copper = copper;
    return load_with(b, rules, NULL);
}

typedef struct plane_case {
    const char *ground;
    double      antipad;       /* mm; 0: no plane */
    int         connects;
    const char *words;         /* of a warning, or null */
} plane_case;

/* Antipad 0.8 of every kind, and what is none; all by hand. */
static const plane_case planes[] = {
    {AREA("G", "<Polygon>" RECTANGLE("0", "0", "10", "10") "</Polygon><Cutout>" CIRCLE("4.6", "5.4", "5", "5") "</Cutout>"), 0.8, 0, NULL},
    {AREA("G", "<Polygon>" RECTANGLE("0", "0", "10", "10") "</Polygon><Cutout>" RECTANGLE("4.6", "4.6", "5.4", "5.4") "</Cutout>"), 0.8, 0, NULL},
    /* the neighbour's cutout overlaps: it takes nothing away from this one */
    {AREA("G", "<Polygon>" RECTANGLE("0", "0", "10", "10") "</Polygon><Cutout>" CIRCLE("4.6", "5.4", "5", "5") "</Cutout><Cutout>"
          CIRCLE("5.2", "6.0", "5.6", "5") "</Cutout>"), 0.8, 0, NULL},
    /* the opening is part of the outline, with a slit of no width to it */
    {AREA("G", "<Polygon><PolyBegin x=\"{0}\" y=\"{0}\"/><PolyStepSegment x=\"{10}\" y=\"{0}\"/><PolyStepSegment x=\"{10}\" y=\"{5.4}\"/>"
          "<PolyStepSegment x=\"{5.4}\" y=\"{5.4}\"/><PolyStepSegment x=\"{5.4}\" y=\"{4.6}\"/><PolyStepSegment x=\"{4.6}\" y=\"{4.6}\"/>"
          "<PolyStepSegment x=\"{4.6}\" y=\"{5.4}\"/><PolyStepSegment x=\"{5.4}\" y=\"{5.4}\"/><PolyStepSegment x=\"{10}\" y=\"{5.4}\"/>"
          "<PolyStepSegment x=\"{10}\" y=\"{10}\"/><PolyStepSegment x=\"{0}\" y=\"{10}\"/><PolyStepSegment x=\"{0}\" y=\"{0}\"/></Polygon>"), 0.8, 0, NULL},
    /* no plane: beside its edge, in a wide opening, elsewhere */
    {AREA("G", "<Polygon>" RECTANGLE("5.6", "0", "10", "10") "</Polygon>"), 0.0, 0, NULL},
    {AREA("G", "<Polygon>" RECTANGLE("0", "0", "10", "10") "</Polygon><Cutout>" RECTANGLE("2", "2", "8", "8") "</Cutout>"), 0.0, 0, NULL},
    {AREA("G", "<Polygon>" RECTANGLE("20", "0", "30", "10") "</Polygon>"), 0.0, 0, NULL},
    /* its own net: covered; in an opening without spokes; in one with a spoke */
    {AREA("S", "<Polygon>" RECTANGLE("0", "0", "10", "10") "</Polygon>"), 0.0, 1, NULL},
    {AREA("S", "<Polygon>" RECTANGLE("0", "0", "10", "10") "</Polygon><Cutout>" CIRCLE("4.6", "5.4", "5", "5") "</Cutout>"), 0.8, 0, NULL},
    {AREA("S", "<Polygon>" RECTANGLE("0", "0", "10", "10") "</Polygon><Cutout>" CIRCLE("4.6", "5.4", "5", "5") "</Cutout>")
     TRACE("S", "5.1", "5", "6", "5"), 0.0, 1, NULL},
    /* another net's copper right on the hole; a plane that is not there */
    {AREA("G", "<Polygon>" RECTANGLE("0", "0", "10", "10") "</Polygon>"), 0.0, 0, "'V1'|'GND'|copper of another net covers it|no plane"},
    {"", 0.0, 0, "'V1'|'GND'|no copper areas|no plane"},
    /* two planes at different distances: the nearer copper counts */
    {AREA("G", "<Polygon>" RECTANGLE("0", "0", "10", "10") "</Polygon><Cutout>" RECTANGLE("4", "4", "6", "6") "</Cutout>")
     AREA("H", "<Polygon>" RECTANGLE("4.1", "4.1", "5.9", "5.9") "</Polygon><Cutout>" CIRCLE("4.6", "5.4", "5", "5") "</Cutout>"), 0.8, 0, NULL},
    /* drawn, not filled */
    {AREA("G", "<Polygon>" RECTANGLE("0", "0", "10", "10") "<FillDesc fillProperty=\"HOLLOW\"/></Polygon>"), 0.0, 0, "no copper areas"},
    /* copper, then a clearance of negative polarity */
    {AREA("G", "<Polygon>" RECTANGLE("0", "0", "10", "10") "</Polygon>")
     "<Set polarity=\"NEGATIVE\"><Features><Location x=\"{5}\" y=\"{5}\"/><Circle diameter=\"{0.8}\"/></Features></Set>", 0.8, 0, NULL},
    {AREA("G", "<Polygon>" RECTANGLE("0", "0", "10", "10") "</Polygon>")
     "<Set><Features><Location x=\"{5}\" y=\"{5}\"/><Contour><Polygon><PolyBegin x=\"{0.4}\" y=\"0\"/>"
     "<PolyStepCurve x=\"{0.4}\" y=\"0\" centerX=\"0\" centerY=\"0\" clockwise=\"true\"/><FillDesc fillProperty=\"VOID\"/></Polygon></Contour></Features></Set>",
     0.8, 0, NULL},
};

START_TEST(positive_planes)
{
    const plane_case *c = &planes[_i];
    test_xml     b = board_parts();
    lstub_board *board = plane_board(&b, c->ground, NULL);
    lstub_via    via = via_of(board, "V1");
    ck_assert_msg(strcmp(connects_of(board, &via), c->connects ? "TOP GND" : "TOP") == 0, "plane %d: %s", _i, connects_of(board, &via));
    if (!c->connects)
        assert_close(antipad_on(board, &via, "GND"), c->antipad * MM, 1e-12, 0.0, BY_HAND);
    ck_assert_int_eq(status_of(board, "V1"), LSTUB_OK);
    if (c->words != NULL)
        ck_assert_msg(noticed(board, LSTUB_NOTICE_WARNING, c->words) == 1, "plane %d: no notice", _i);
    lstub_board_destroy(board);
}
END_TEST

START_TEST(default_antipads)
{
    test_xml     b = board_parts();
    lstub_board *board = plane_board(&b, AREA("G", "<Polygon>" RECTANGLE("0", "0", "10", "10") "</Polygon>"), "default antipad 0.7 mm");
    lstub_via    via = via_of(board, "V1");
    assert_close(antipad_on(board, &via, "GND"), 0.7 * MM, 1e-12, 0.0, BY_HAND);
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_WARNING, "'GND'|covers it|0.7 mm"), 1);
    lstub_board_destroy(board);
}
END_TEST

static void negative_ground(test_xml *b, char layers[4096])
{
    const char *at = strstr(b->layers, "<Layer name=\"D2\"");
    snprintf(layers, 4096, "<Layer name=\"TOP\" layerFunction=\"CONDUCTOR\" side=\"TOP\"/><Layer name=\"D1\" layerFunction=\"DIELPREG\"/>"
             "<Layer name=\"GND\" layerFunction=\"PLANE\" polarity=\"NEGATIVE\"/>%s", at);
    b->layers = layers;
    b->drills = ON("DRILL", HOLE("V1", "S", "5", "5") HOLE("V2", "G", "7", "5") HOLE("V3", "G", "9", "5"));
}

START_TEST(negative_planes)
{
    test_xml b = board_parts();
    char     layers[4096];
    negative_ground(&b, layers);
    lstub_board *board = plane_board(&b, PAD_OF("S", "ANTI", "5", "5", "") PAD_OF("G", "RELIEF", "7", "5", ""), NULL);
    lstub_via    via = via_of(board, "V1");
    ck_assert_str_eq(connects_of(board, &via), "TOP");
    assert_close(antipad_on(board, &via, "GND"), 0.9 * MM, 1e-12, 0.0, BY_HAND);
    via = via_of(board, "V2");              /* a thermal relief connects */
    ck_assert_str_eq(connects_of(board, &via), "GND");
    via = via_of(board, "V3");              /* so does no clearance at all, but that is said */
    ck_assert_str_eq(connects_of(board, &via), "GND");
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_WARNING, "'V3'|'GND'|no clearance"), 1);
    lstub_board_destroy(board);
    board = plane_board(&b, "", NULL);      /* nothing drawn: nothing is known */
    via = via_of(board, "V1");
    ck_assert_str_eq(connects_of(board, &via), "TOP");
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_WARNING, "'GND'|negative layer|no plane"), 3);
    lstub_board_destroy(board);
    board = plane_board(&b, AREA("", "<Polygon>" RECTANGLE("0", "0", "8", "10") "</Polygon>") PAD_OF("G", "ANTI", "9", "5", ""), NULL);
    via = via_of(board, "V1");              /* in a wide area that is etched away */
    assert_close(antipad_on(board, &via, "GND"), 0.0, 0.0, 0.0, BY_HAND);
    via = via_of(board, "V3");
    assert_close(antipad_on(board, &via, "GND"), 0.9 * MM, 1e-12, 0.0, BY_HAND);
    lstub_board_destroy(board);
}
END_TEST

START_TEST(conductor_layers_with_areas)
{
    test_xml b = board_parts();
    b.copper = ON("TOP", TRACE("S", "2", "5", "5", "5"))
               ON("BOT", AREA("G", "<Polygon>" RECTANGLE("0", "0", "10", "10") "</Polygon><Cutout>" CIRCLE("4.6", "5.4", "5", "5") "</Cutout>"))
               ON("SIG", AREA("G", "<Polygon>" RECTANGLE("6", "0", "10", "10") "</Polygon>"));
    lstub_board *board = load(&b);
    lstub_via    via = via_of(board, "V1");
    ck_assert_int_eq(kind_of(board, "BOT"), LSTUB_LAYER_MIXED);
    ck_assert_int_eq(kind_of(board, "SIG"), LSTUB_LAYER_SIGNAL);
    assert_close(antipad_on(board, &via, "BOT"), 0.8 * MM, 1e-12, 0.0, BY_HAND);
    assert_close(clear_on(board, &via, "SIG"), 2.0 * MM, 1e-12, 0.0, BY_HAND);
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_NOTE, "'BOT'|mixed layer"), 1);
    lstub_board_destroy(board);
}
END_TEST

/* ---- connections -------------------------------------------------------------------------------- */

typedef struct connect_case {
    const char *top;           /* features on TOP */
    int         connects;      /* V1 of net S at (5, 5), drill 0.25 */
} connect_case;

static const connect_case meetings[] = {
    {TRACE("S", "5", "5", "9", "5"), 1},
    {TRACE("S", "1", "5", "9", "5"), 1},                                          /* passes through */
    {TRACE("S", "1", "5.12", "9", "5.12"), 1},                                    /* touches the barrel */
    {TRACE("S", "1", "5.18", "9", "5.18"), 0},                                    /* 0.13 off its edge: passes by */
    {TRACE("S", "1", "5.18", "9", "5.18") PAD_OF("S", "PAD", "5", "5", ""), 1},   /* but over the pad */
    {PAD_OF("S", "PAD", "5", "5", ""), 0},                                        /* a pad alone leads nowhere */
    {TRACE("T", "1", "5", "9", "5"), 0},                                          /* another net */
    {TRACE("", "1", "5", "9", "5"), 0},                                           /* no net */
    {PAD_OF("S", "SMD", "5.4", "5", "") , 1},                                     /* a land that covers the axis */
    {PAD_OF("S", "SMD", "5.8", "5", ""), 0},
    {PAD_OF("S", "SMD", "5", "5.5", "<Xform rotation=\"90\"/>"), 1},              /* turned over the axis */
    {PAD_OF("S", "SMD", "5", "5.5", ""), 0},
    {"<Set net=\"S\"><Pad><Location x=\"{5.7}\" y=\"{5}\"/><StandardPrimitiveRef id=\"SMD\"/><PinRef pin=\"1\" componentRef=\"U1\"/></Pad></Set>", 1},
    {"<Set net=\"S\"><Features><Location x=\"{3}\" y=\"{4}\"/><Polyline><PolyBegin x=\"{0}\" y=\"{0}\"/><PolyStepSegment x=\"{2}\" y=\"{1}\"/>"
     "<LineDescRef id=\"L\"/></Polyline></Features></Set>", 1},                   /* moved by its Location */
    {"<Set net=\"S\"><Features><Xform rotation=\"90\"/><Location x=\"{5}\" y=\"{3}\"/><Polyline><PolyBegin x=\"{0}\" y=\"{0}\"/>"
     "<PolyStepSegment x=\"{2}\" y=\"{0}\"/><LineDesc lineEnd=\"ROUND\" lineWidth=\"{0.1}\"/></Polyline></Features></Set>", 1},
    {"<Set net=\"S\"><Features><Location x=\"0\" y=\"0\"/><Polyline><PolyBegin x=\"{4}\" y=\"{4}\"/>"
     "<PolyStepCurve x=\"{4}\" y=\"{6}\" centerX=\"{4}\" centerY=\"{5}\" clockwise=\"false\"/><LineDescRef id=\"L\"/></Polyline></Features></Set>", 1},
    {"<Set net=\"S\"><Features><Location x=\"0\" y=\"0\"/><Polyline><PolyBegin x=\"{4}\" y=\"{4}\"/>"
     "<PolyStepCurve x=\"{4}\" y=\"{6}\" centerX=\"{4}\" centerY=\"{5}\" clockwise=\"true\"/><LineDescRef id=\"L\"/></Polyline></Features></Set>", 0},
    {"<Set net=\"S\"><Features><Xform mirror=\"true\"/><Location x=\"{8}\" y=\"0\"/><Polyline><PolyBegin x=\"{4}\" y=\"{4}\"/>"
     "<PolyStepCurve x=\"{4}\" y=\"{6}\" centerX=\"{4}\" centerY=\"{5}\" clockwise=\"true\"/><LineDescRef id=\"L\"/></Polyline></Features></Set>", 1},
    {"<Set net=\"S\"><Features><Location x=\"0\" y=\"0\"/><Arc startX=\"{4}\" startY=\"{4}\" endX=\"{4}\" endY=\"{6}\" centerX=\"{4}\" centerY=\"{5}\" "
     "clockwise=\"false\"><LineDescRef id=\"L\"/></Arc></Features></Set>", 1},
    {AREA("S", "<Polygon>" RECTANGLE("4.9", "4.9", "6", "6") "</Polygon>"), 1},
    {AREA("S", "<Polygon>" RECTANGLE("5.1", "5.1", "6", "6") "</Polygon>"), 0},   /* 0.1414 from the axis, drill radius 0.125 */
};

START_TEST(what_connects)
{
    const connect_case *c = &meetings[_i];
    test_xml b = board_parts();
    char     copper[4096];
    snprintf(copper, sizeof copper, "<LayerFeature layerRef=\"TOP\">%s</LayerFeature>%s", c->top, ON("SIG", TRACE("S", "5", "5", "5", "9")));
    b.copper = copper;
    lstub_board *board = load(&b);
    lstub_via    via = via_of(board, "V1");
    ck_assert_msg(strcmp(connects_of(board, &via), c->connects ? "TOP SIG" : "SIG") == 0, "meeting %d: %s", _i, connects_of(board, &via));
    lstub_board_destroy(board);
}
END_TEST

#define PIN(layer, more) ON(layer, "<Set net=\"S\"><Pad padstackDefRef=\"VIA\">" more "<Location x=\"{5}\" y=\"{5}\"/>" \
    "<StandardPrimitiveRef id=\"PAD\"/><PinRef pin=\"1\" componentRef=\"J1\"/></Pad></Set>")

/* A through-hole pin has pads on all layers, but leads away on the side of its component. */
START_TEST(pins)
{
    test_xml b = board_parts();
    b.drills = ON("DRILL", "<Set net=\"S\" geometry=\"PRESS\"><Hole name=\"V1\" diameter=\"{0.25}\" platingStatus=\"PLATED\" x=\"{5}\" y=\"{5}\"/></Set>");
    b.copper = PIN("TOP", "") PIN("SIG", "") ON("SIG", TRACE("S", "5", "5", "5", "9")) PIN("BOT", "");
    lstub_board *board = load_with(&b, "pin PRESS* length 0.6 mm", NULL);
    lstub_via    via = via_of(board, "V1");
    ck_assert_str_eq(connects_of(board, &via), "TOP SIG");
    assert_close(via.pad_end, 0.5 * MM, 1e-12, 0.0, BY_HAND);
    ck_assert_int_eq(via.pin_side, LSTUB_SIDE_TOP);
    assert_close(via.pin_length, 0.6 * MM, 1e-12, 0.0, BY_HAND);
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_WARNING, "'V1'|on which side"), 1);
    lstub_board_destroy(board);
    b.step = "<Component refDes=\"J1\" layerRef=\"BOT\"/>";
    board = load_with(&b, "pin PRESS* length 0.6 mm", NULL);
    via = via_of(board, "V1");
    ck_assert_str_eq(connects_of(board, &via), "SIG BOT");
    ck_assert_int_eq(via.pin_side, LSTUB_SIDE_BOTTOM);
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_WARNING, "on which side"), 0);
    lstub_board_destroy(board);
    b.step = "";
    b.copper = PIN("TOP", "") ON("SIG", TRACE("S", "5", "5", "5", "9")) PIN("BOT", "<Xform mirror=\"true\"/>");
    board = load(&b);
    via = via_of(board, "V1");
    ck_assert_str_eq(connects_of(board, &via), "SIG BOT");
    lstub_board_destroy(board);
    b = board_parts();                      /* a land in one outer layer only: the via is in the pad */
    b.copper = PIN("BOT", "") ON("SIG", TRACE("S", "5", "5", "5", "9"));
    board = load(&b);
    via = via_of(board, "V1");
    ck_assert_str_eq(connects_of(board, &via), "SIG BOT");
    lstub_board_destroy(board);
}
END_TEST

START_TEST(vias_on_vias)
{
    test_xml b = board_parts();
    char     layers[4096];
    snprintf(layers, sizeof layers, "%s%s", b.layers, SPAN("D12", "TOP", "GND") SPAN("D23", "GND", "SIG"));
    b.layers = layers;
    b.copper = ON("TOP", TRACE("S", "2", "5", "5", "5")) ON("SIG", TRACE("S", "5.2", "5", "5", "9"))
               ON("GND", PAD_OF("S", "PAD", "5", "5", ""));
    b.drills = ON("D12", HOLE("U1", "S", "5", "5")) ON("D23", HOLE("U2", "S", "5.2", "5")) ON("DRILL", HOLE("T", "T", "5", "5.6"));
    lstub_board *board = load(&b);
    lstub_via    via = via_of(board, "U1");
    ck_assert_str_eq(connects_of(board, &via), "TOP GND");
    via = via_of(board, "U2");
    ck_assert_str_eq(connects_of(board, &via), "GND SIG");
    /* another net's barrel in the way: 0.6 between the axes, its radius 0.125 */
    via = via_of(board, "U1");
    assert_close(clear_on(board, &via, "TOP"), 2.0 * (0.6 - 0.125) * MM, 1e-12, 0.0, BY_HAND);
    lstub_board_destroy(board);
}
END_TEST

START_TEST(room_for_a_bit)
{
    test_xml b = board_parts();
    b.copper = ON("TOP", TRACE("S", "2", "5", "5", "5")) ON("SIG", TRACE("T", "1", "5.5", "9", "5.5"))
               ON("BOT", PAD_OF("T", "SMD", "6", "5", "") PAD_OF("T", "PAD", "5", "4.2", ""));
    lstub_board *board = load(&b);
    lstub_via    via = via_of(board, "V1");
    assert_close(clear_on(board, &via, "SIG"), 2.0 * 0.45 * MM, 1e-12, 0.0, BY_HAND);
    assert_close(clear_on(board, &via, "BOT"), 2.0 * 0.4 * MM, 1e-12, 0.0, BY_HAND);
    assert_close(clear_on(board, &via, "TOP"), -1.0, 0.0, 0.0, BY_HAND);
    lstub_board_destroy(board);
}
END_TEST

/* ---- neighbours --------------------------------------------------------------------------------- */

START_TEST(returns)
{
    test_xml b = board_parts();
    b.drills = ON("DRILL", HOLE("V1", "S", "5", "5") HOLE("G1", "GND", "6", "5") HOLE("G2", "GND", "5", "3") HOLE("G3", "GND", "9", "5")
                  HOLE("P1", "PWR", "5.5", "5"));
    b.copper = ON("TOP", TRACE("S", "2", "5", "5", "5") TRACE("GND", "5", "3", "9", "3"));
    lstub_board *board = load_with(&b, "returns GND within 2.5 mm", NULL);
    lstub_via    via = via_of(board, "V1");
    ck_assert_int_eq(via.return_kind, LSTUB_RETURN_VIAS);
    ck_assert_int_eq(via.return_count, 2);
    assert_close(via.return_distance, sqrt(2.0) * MM, 0.0, 1e-7, "geometric mean of 1 and 2 mm");
    assert_close(via.return_drill, 0.25 * MM, 1e-12, 0.0, BY_HAND);
    via = via_of(board, "G2");
    ck_assert_int_eq(via.return_kind, LSTUB_RETURN_NONE);
    lstub_board_destroy(board);
    board = load_with(&b, "returns GND within 0.9 mm", NULL);
    via = via_of(board, "V1");
    ck_assert_int_eq(via.return_kind, LSTUB_RETURN_NONE);
    lstub_board_destroy(board);
}
END_TEST

/* More return vias than have room on one circle: as many of the nearest as do. */
START_TEST(crowded_returns)
{
    test_xml b = board_parts();
    char     drills[16384], one[256];
    snprintf(drills, sizeof drills, "<LayerFeature layerRef=\"DRILL\">%s", HOLE("V1", "S", "5", "5"));
    for (int i = 0; i < 40; i++) {
        snprintf(one, sizeof one, "<Set net=\"GND\"><Hole name=\"G%d\" diameter=\"{0.25}\" platingStatus=\"VIA\" x=\"{%.6f}\" y=\"{%.6f}\"/></Set>", i,
                 5.0 + (0.5 + 0.02 * i) * cos(i * 2.4), 5.0 + (0.5 + 0.02 * i) * sin(i * 2.4));
        strcat(drills, one);
    }
    strcat(drills, "</LayerFeature>");
    b.drills = drills;
    lstub_board *board = load_with(&b, "returns GND within 2 mm", NULL);
    lstub_via    via = via_of(board, "V1");
    ck_assert_int_eq(status_of(board, "V1"), LSTUB_OK);
    ck_assert_int_gt(via.return_count, 4);
    ck_assert_int_lt(via.return_count, 40);
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_NOTE, "'V1'|40 return vias"), 1);
    lstub_board_destroy(board);
}
END_TEST

START_TEST(pairs)
{
    test_xml b = board_parts();
    b.drills = ON("DRILL", HOLE("P", "X_P", "5", "5") HOLE("N", "X_N", "5.7", "5") HOLE("N2", "X_N", "9", "5") HOLE("L", "Y_P", "1", "1"));
    b.copper = ON("TOP", TRACE("X_P", "2", "5", "5", "5") TRACE("X_N", "5.7", "5", "9", "5") TRACE("Y_P", "1", "1", "2", "1"))
               ON("GND", AREA("G", "<Polygon>" RECTANGLE("0", "0", "10", "10") "</Polygon><Cutout>" RECTANGLE("4.7", "4.7", "6", "5.3") "</Cutout>"
                  "<Cutout>" CIRCLE("0.6", "1.4", "1", "1") "</Cutout><Cutout>" CIRCLE("8.6", "9.4", "9", "5") "</Cutout>"));
    lstub_board *board = load_with(&b, "pair _P _N", NULL);
    lstub_via    via = via_of(board, "P");
    lstub_hole   hole;
    LSTUB_INIT(hole);
    assert_ok(lstub_board_hole(board, 0, &hole, &err), err);
    ck_assert_int_eq(hole.partner, 1);
    assert_ok(lstub_board_hole(board, 1, &hole, &err), err);
    ck_assert_int_eq(hole.partner, 0);
    assert_ok(lstub_board_hole(board, 2, &hole, &err), err);
    ck_assert_int_eq(hole.partner, -1);
    ck_assert_int_eq(via.pair_kind, LSTUB_PAIR_SHARED);            /* one opening holds both */
    assert_close(via.pair_pitch, 0.7 * MM, 0.0, 1e-9, BY_HAND);
    ck_assert_int_eq(via_of(board, "L").pair_kind, LSTUB_PAIR_NONE);
    lstub_board_destroy(board);
    board = load_with(&b, "pair _P _N separate", NULL);
    ck_assert_int_eq(via_of(board, "P").pair_kind, LSTUB_PAIR_SEPARATE);
    lstub_board_destroy(board);
    b.copper = ON("TOP", TRACE("X_P", "2", "5", "5", "5") TRACE("X_N", "5.7", "5", "9", "5"))
               ON("GND", AREA("G", "<Polygon>" RECTANGLE("0", "0", "10", "10") "</Polygon><Cutout>" RECTANGLE("4.7", "4.7", "5.3", "5.3") "</Cutout>"
                  "<Cutout>" RECTANGLE("5.4", "4.7", "6", "5.3") "</Cutout>"));
    board = load_with(&b, "pair _P _N", NULL);
    ck_assert_int_eq(via_of(board, "P").pair_kind, LSTUB_PAIR_SEPARATE);
    lstub_board_destroy(board);
}
END_TEST

START_TEST(signals)
{
    test_xml     b = board_parts();
    lstub_board *board = load_with(&b, "signal FAST symbol_rate 10 GBd levels 2 notch_over_nyquist 2\nsignal SLOW symbol_rate 1 GBd levels 2 "
                                   "notch_over_nyquist 2\nnet S SLOW", NULL);
    lstub_hole   hole;
    LSTUB_INIT(hole);
    assert_ok(lstub_board_hole(board, 0, &hole, &err), err);
    ck_assert_int_eq(hole.signal, 1);
    lstub_board_destroy(board);
}
END_TEST

int main(void)
{
    Suite *suite = suite_create("ipc2581 copper");
    TCase *tests = tcase_create("copper");
    tcase_add_loop_test(tests, positive_planes, 0, (int)COUNT(planes));
    tcase_add_test(tests, default_antipads);
    tcase_add_test(tests, negative_planes);
    tcase_add_test(tests, conductor_layers_with_areas);
    tcase_add_loop_test(tests, what_connects, 0, (int)COUNT(meetings));
    tcase_add_test(tests, pins);
    tcase_add_test(tests, vias_on_vias);
    tcase_add_test(tests, room_for_a_bit);
    tcase_add_test(tests, returns);
    tcase_add_test(tests, crowded_returns);
    tcase_add_test(tests, pairs);
    tcase_add_test(tests, signals);
    suite_add_tcase(suite, tests);
    return test_main(suite);
}
