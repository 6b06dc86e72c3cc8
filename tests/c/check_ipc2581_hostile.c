/* The reader of boards against files that are not boards, broken ones, and a machine without memory. */
#define BOARD_FILE "check_hostile.xml"
#include "check_ipc2581.h"

static lstub_error err;

static int32_t load_path(const char *path)
{
    lstub_board *board = NULL;
    LSTUB_INIT(err);
    int32_t status = lstub_board_load(path, NULL, NULL, NULL, &board, &err);
    lstub_board_destroy(board);
    if (status < 0)
        ck_assert_ptr_null(board);
    return status;
}

static void write_bytes(const char *path, const void *bytes, size_t count)
{
    FILE *file = fopen(path, "wb");
    ck_assert_ptr_nonnull(file);
    ck_assert_uint_eq(fwrite(bytes, 1, count, file), count);
    ck_assert_int_eq(fclose(file), 0);
}

static char *read_bytes(const char *path, size_t *count)
{
    FILE *file = fopen(path, "rb");
    ck_assert_ptr_nonnull(file);
    ck_assert_int_eq(fseek(file, 0, SEEK_END), 0);
    *count = (size_t)ftell(file);
    rewind(file);
    char *bytes = malloc(*count + 1);
    ck_assert_ptr_nonnull(bytes);
    ck_assert_uint_eq(fread(bytes, 1, *count, file), *count);
    bytes[*count] = '\0';
    fclose(file);
    return bytes;
}

/* A gzip file of stored blocks: enough to be read, small enough to make here (RFC 1951, 1952). */
static size_t gzip(const char *in, size_t count, unsigned char *out)
{
    static const unsigned char head[10] = {0x1f, 0x8b, 8, 0, 0, 0, 0, 0, 0, 255};
    size_t   n = sizeof head;
    uint32_t crc = 0xffffffffu;
    memcpy(out, head, sizeof head);
    for (size_t at = 0, part; at < count; at += part) {
        part = count - at < 60000 ? count - at : 60000;
        out[n++] = at + part == count;
        out[n++] = (unsigned char)(part & 255u);
        out[n++] = (unsigned char)(part >> 8);
        out[n++] = (unsigned char)(~part & 255u);
        out[n++] = (unsigned char)(~part >> 8 & 255u);
        memcpy(out + n, in + at, part);
        n += part;
    }
    for (size_t i = 0; i < count; i++) {
        crc ^= (unsigned char)in[i];
        for (int k = 0; k < 8; k++)
            crc = crc >> 1 ^ (crc & 1u ? 0xedb88320u : 0u);
    }
    crc = ~crc;
    for (int k = 0; k < 4; k++)
        out[n++] = (unsigned char)(crc >> 8 * k);
    for (int k = 0; k < 4; k++)
        out[n++] = (unsigned char)((uint32_t)count >> 8 * k);
    return n;
}

static char *board_text(size_t *count)
{
    test_xml b = board_parts();
    write_board(&b);
    return read_bytes(BOARD_FILE, count);
}

/* ---- files that are none ------------------------------------------------------------------------- */

START_TEST(no_file)
{
    lstub_board *board = NULL;
    assert_refused(load_path("no/such/board.xml"), LSTUB_E_READ, err, "no/such/board.xml|no such file");
    assert_refused(load_path("."), LSTUB_E_READ, err, "'.'|cannot be read");
    assert_refused(lstub_board_load(NULL, NULL, NULL, NULL, &board, &err), LSTUB_E_NULL, err, "path");
    assert_refused(lstub_board_load(BOARD_FILE, NULL, NULL, NULL, NULL, &err), LSTUB_E_NULL, err, "out");
    lstub_board_options options;
    memset(&options, 0, sizeof options);
    assert_refused(lstub_board_load(BOARD_FILE, NULL, &options, NULL, &board, &err), LSTUB_E_SIZE, err, "options|LSTUB_INIT");
    lstub_board_destroy(NULL);
    ck_assert_uint_eq(lstub_board_hole_count(NULL), 0);
    ck_assert_uint_eq(lstub_board_notice_count(NULL), 0);
    ck_assert_ptr_null(lstub_board_stackup(NULL));
    ck_assert_str_eq(lstub_board_name(NULL), "");
}
END_TEST

START_TEST(indexes)
{
    test_xml     b = board_parts();
    lstub_board *board = load(&b);
    lstub_hole   hole;
    lstub_via    via;
    lstub_notice notice;
    poison(hole);
    poison(via);
    poison(notice);
    assert_refused(lstub_board_hole(board, 1, &hole, &err), LSTUB_E_ARGUMENT, err, "index = 1|< 1");
    assert_refused(lstub_board_via(board, 1, &via, &err), LSTUB_E_ARGUMENT, err, "index = 1|< 1");
    assert_refused(lstub_board_notice(board, 99, &notice, &err), LSTUB_E_ARGUMENT, err, "index = 99");
    assert_refused(lstub_board_hole(NULL, 0, &hole, &err), LSTUB_E_NULL, err, "board");
    assert_untouched(hole);
    assert_untouched(via);
    assert_untouched(notice);
    assert_refused(lstub_board_hole(board, 0, NULL, &err), LSTUB_E_NULL, err, "out");
    lstub_board_destroy(board);
}
END_TEST

typedef struct text_case {
    const char *text;
    const char *words;
    int32_t     status;
} text_case;

#define DOCUMENT(inner) "<IPC-2581 revision=\"C\">" inner "</IPC-2581>"

static const text_case texts[] = {
    {"", "the file is empty", LSTUB_E_FORMAT},
    {"hello", "line 1, column 1|not XML", LSTUB_E_FORMAT},
    {"\x01\x02\x03\xff", "not XML", LSTUB_E_FORMAT},
    {"\x1f\x8bgarbage that only begins as gzip does", "check_hostile.xml", LSTUB_E_READ},
    {"<html><body/></html>", "line 1|<html>|<IPC-2581>", LSTUB_E_FORMAT},
    {"<?xml version=\"1.0\" encoding=\"KLINGON\"?><IPC-2581/>", "not XML|encoding", LSTUB_E_FORMAT},
    {DOCUMENT(""), "CadHeader", LSTUB_E_FORMAT},
    {DOCUMENT("<Ecad><CadHeader units=\"INCH\"/></Ecad>"), "no Stackup", LSTUB_E_FORMAT},
    {DOCUMENT("<Ecad>\n<CadHeader units=\"FURLONG\"/></Ecad>"), "line 2|FURLONG|INCH, MILLIMETER or MICRON", LSTUB_E_FORMAT},
    {DOCUMENT("<Ecad>\n\n<CadHeader/></Ecad>"), "line 3|units|INCH", LSTUB_E_FORMAT},
    {DOCUMENT("<Content><DictionaryStandard units=\"PARSEC\"/></Content>"), "PARSEC", LSTUB_E_FORMAT},
    {DOCUMENT("<Ecad><CadHeader units=\"INCH\"/><CadHeader units=\"MICRON\"/></Ecad>"), "MICRON|other units", LSTUB_E_FORMAT},
    {DOCUMENT("<Ecad><CadData><Step name=\"S\"/></CadData></Ecad>"), "no CadHeader", LSTUB_E_FORMAT},
    {DOCUMENT("<Ecad><CadData><Stackup name=\"S\"/></CadData></Ecad>"), "no CadHeader", LSTUB_E_FORMAT},
    {DOCUMENT("<Ecad><CadHeader units=\"INCH\">"), "not XML|mismatched", LSTUB_E_FORMAT},
    {"<IPC-2581><Ecad>\n<CadHeader units=\"INCH\">", "line 2|cut off", LSTUB_E_FORMAT},
    {"<!DOCTYPE a [\n<!ENTITY x \"y\">]>" DOCUMENT("&x;"), "line 2|entity 'x'|refused", LSTUB_E_FORMAT},
    {"<!DOCTYPE a [<!ENTITY % p SYSTEM \"file:///etc/passwd\">]>" DOCUMENT(""), "entity 'p'|refused", LSTUB_E_FORMAT},
    {"<!DOCTYPE a [<!ENTITY a \"aaaaaaaaaa\"><!ENTITY b \"&a;&a;&a;&a;\"><!ENTITY c \"&b;&b;&b;&b;\">]>" DOCUMENT("&c;"), "entity 'a'|refused",
     LSTUB_E_FORMAT},
    {DOCUMENT("&nothing;"), "not XML|entity", LSTUB_E_FORMAT},
};

START_TEST(not_boards)
{
    const text_case *c = &texts[_i];
    write_bytes(BOARD_FILE, c->text, strlen(c->text));
    assert_refused(load_path(BOARD_FILE), c->status, err, c->words);
}
END_TEST

/* ---- values that are none ------------------------------------------------------------------------ */

typedef struct value_case {
    const char *from, *to;     /* in the board of the helper */
    const char *words;
} value_case;

static const value_case values[] = {
    {"diameter=\"0.25\"", "diameter=\"NaN\"", "line |<Hole> diameter = 'NaN'|number"},
    {"diameter=\"0.25\"", "diameter=\"-INF\"", "<Hole> diameter = '-INF'|number"},
    {"diameter=\"0.25\"", "diameter=\"0,25\"", "<Hole> diameter = '0,25'|number"},
    {"diameter=\"0.25\"", "diameter=\"\"", "<Hole> diameter = ''|number"},
    {"diameter=\"0.25\"", "diameter=\"1e999\"", "<Hole> diameter = '1e999'|number"},
    {"diameter=\"0.25\"", "diameter=\"1e30\"", "<Hole> diameter = 1e30|100 m"},
    {"plusTol=\"0\" minusTol=\"0\" x=\"5\"", "X=\"5\"", "<Hole>|'x' is missing"},
    {"thickness=\"0.2\"", "thickness=\"thick\"", "<StackupLayer> thickness = 'thick'|number"},
    {"sequence=\"2\"", "sequence=\"two\"", "<StackupLayer> sequence = 'two'|number"},
    {"value=\"3.6\"", "value=\"FR4\"", "<Property> value = 'FR4'|number"},
    {"<Circle diameter=\"0.5\"", "<Circle diameter=\"-0.5\"", "diameter = -0.5|>= 0"},
    {"<Circle diameter=\"0.5\"", "<Circle", "<Circle>|'diameter' is missing"},
    {"lineWidth=\"0.1\"", "lineWidth=\"fat\"", "<LineDesc> lineWidth = 'fat'|number"},
    {"<PolyBegin x=\"2\"", "<PolyBegin x=\"0x2\"", "<PolyBegin> x = '0x2'|number"},
    {"centerX=\"5\"", "centre=\"5\"", "<PolyStepCurve>|'centerX' is missing"},
    {"<Line startX=\"5\"", "<Line startX=\"1e6\"", "<Line> startX = 1e6|100 m"},
};

/* Every bad value stops the reading with its line, whichever pass meets it. */
START_TEST(bad_values)
{
    const value_case *c = &values[_i];
    size_t count;
    char  *text = board_text(&count), *at = strstr(text, c->from), *bad = malloc(count + 256);
    ck_assert_msg(at != NULL, "no '%s' in the board", c->from);
    size_t before = (size_t)(at - text);
    memcpy(bad, text, before);
    strcpy(bad + before, c->to);
    strcat(bad, at + strlen(c->from));
    write_bytes(BOARD_FILE, bad, strlen(bad));
    assert_refused(load_path(BOARD_FILE), LSTUB_E_FORMAT, err, c->words);
    long line = 1;
    for (size_t i = 0; i < before; i++)
        line += text[i] == '\n';
    ck_assert_int_ge(err.index, line - 1);
    ck_assert_int_le(err.index, line + 1);
    free(text);
    free(bad);
}
END_TEST

/* ---- too much of something ------------------------------------------------------------------------ */

START_TEST(nesting)
{
    static char deep[64 * 8 + 64 * 8 + 64];
    for (int open = 60; open <= 70; open += 10) {
        strcpy(deep, "<IPC-2581>");
        for (int i = 0; i < open; i++)
            strcat(deep, "<a>");
        for (int i = 0; i < open; i++)
            strcat(deep, "</a>");
        strcat(deep, "</IPC-2581>");
        write_bytes(BOARD_FILE, deep, strlen(deep));
        if (open < 64)
            assert_refused(load_path(BOARD_FILE), LSTUB_E_FORMAT, err, "CadHeader");
        else
            assert_refused(load_path(BOARD_FILE), LSTUB_E_FORMAT, err, "line 1|64 elements");
    }
}
END_TEST

/* before, then 'x' count times, then after: a gigabyte of attribute must not be waited for, nor kept. */
static void write_long(const char *before, size_t count, const char *after)
{
    static char many[65536];
    FILE *file = fopen(BOARD_FILE, "wb");
    ck_assert_ptr_nonnull(file);
    memset(many, 'x', sizeof many);
    fputs(before, file);
    for (size_t left = count; left > 0;) {
        size_t part = left < sizeof many ? left : sizeof many;
        ck_assert_uint_eq(fwrite(many, 1, part, file), part);
        left -= part;
    }
    fputs(after, file);
    ck_assert_int_eq(fclose(file), 0);
}

START_TEST(long_values)
{
    write_long("<IPC-2581 a=\"", 65000, "\"></IPC-2581>");
    assert_refused(load_path(BOARD_FILE), LSTUB_E_FORMAT, err, "CadHeader");
    write_long("<IPC-2581 a=\"", 66000, "\"></IPC-2581>");
    assert_refused(load_path(BOARD_FILE), LSTUB_E_FORMAT, err, "line 1|65536 bytes");
    write_long("<IPC-2581><", 66000, "/></IPC-2581>");
    assert_refused(load_path(BOARD_FILE), LSTUB_E_FORMAT, err, "line 1|65536 bytes");
    write_long("<IPC-2581>\n<!-- ", 50000000, " --></IPC-2581>");
    assert_refused(load_path(BOARD_FILE), LSTUB_E_FORMAT, err, "comment|262144 bytes");
    write_long("<IPC-2581 a=\"", 50000000, "\"></IPC-2581>");
    assert_refused(load_path(BOARD_FILE), LSTUB_E_FORMAT, err, "262144 bytes");
    write_long("<IPC-2581>", 50000000, "</IPC-2581>");             /* text between elements is passed over */
    assert_refused(load_path(BOARD_FILE), LSTUB_E_FORMAT, err, "CadHeader");
    remove(BOARD_FILE);
}
END_TEST

/* Long names go into messages and notices cut short, not beyond them. */
START_TEST(long_names)
{
    static char layers[200000], name[60001];
    test_xml    b = board_parts();
    memset(name, 'N', sizeof name - 1);
    snprintf(layers, sizeof layers, "%s<Layer name=\"%s\" layerFunction=\"DRILL\"/><Layer name=\"%s\" layerFunction=\"DRILL\"/>", b.layers, name, name);
    b.layers = layers;
    lstub_board *board = load(&b);
    ck_assert_int_eq(noticed(board, LSTUB_NOTICE_WARNING, "comes twice"), 1);
    lstub_board_destroy(board);
}
END_TEST

/* ---- cut short and spoilt ------------------------------------------------------------------------- */

START_TEST(cut_short)
{
    size_t         count;
    char          *text = board_text(&count);
    unsigned char *zipped = malloc(count + 1024);
    size_t         n = gzip(text, count, zipped);
    for (size_t i = 0; i < count - 1; i += 7) {          /* the last byte is a line end */
        write_bytes(BOARD_FILE, text, i);
        int32_t status = load_path(BOARD_FILE);
        ck_assert_msg(status == LSTUB_E_FORMAT, "%lu bytes: %s", (unsigned long)i, lstub_status_name(status));
    }
    for (size_t i = 20; i < n; i += 97) {
        write_bytes(BOARD_FILE, zipped, i);
        assert_refused(load_path(BOARD_FILE), LSTUB_E_READ, err, "cut off");
    }
    write_bytes(BOARD_FILE, zipped, n);
    ck_assert_int_eq(load_path(BOARD_FILE), LSTUB_OK);
    zipped[n - 6] ^= 1;                                  /* the checksum */
    write_bytes(BOARD_FILE, zipped, n);
    assert_refused(load_path(BOARD_FILE), LSTUB_E_READ, err, "check_hostile.xml");
    free(text);
    free(zipped);
}
END_TEST

/* Any byte another one: an answer or a named error; the sanitizers watch. */
START_TEST(spoilt)
{
    static const char digits[] = "0123456789.-+eE\"<>/= x&";
    size_t count;
    char  *text = board_text(&count);
    long   answers = 0;
    for (uint64_t i = 0; i < 1500; i++) {
        size_t at = (size_t)(test_random(7, 3 * i) * (double)count);
        char   was = text[at], kind = test_random(7, 3 * i + 1) < 0.8;
        double u = test_random(7, 3 * i + 2);
        text[at] = kind ? digits[(size_t)(u * (double)(sizeof digits - 1))] : (char)(unsigned char)(u * 256.0);
        write_bytes(BOARD_FILE, text, count);
        int32_t status = load_path(BOARD_FILE);
        answers += status == LSTUB_OK;
        ck_assert_msg(status == LSTUB_OK || (err.status == status && err.message[0] != '\0'), "%s", lstub_status_name(status));
        text[at] = was;
    }
    ck_assert_int_gt(answers, 200);
    free(text);
}
END_TEST

/* Whole elements left out or doubled: what refers to them is noticed or refused. */
START_TEST(spoilt_structure)
{
    size_t count, lines = 0, starts[1024];
    char  *text = board_text(&count), *bad = malloc(2 * count);
    for (size_t i = 0; i < count; i++)
        if ((i == 0 || text[i - 1] == '\n') && lines < COUNT(starts))
            starts[lines++] = i;
    ck_assert_uint_gt(lines, 50);
    for (size_t k = 0; k + 1 < lines; k++)
        for (int twice = 0; twice < 2; twice++) {
            size_t from = starts[k], to = starts[k + 1], n = twice ? to : from;
            memcpy(bad, text, n);
            size_t rest = twice ? from : to;
            memcpy(bad + n, text + rest, count - rest);
            write_bytes(BOARD_FILE, bad, n + count - rest);
            int32_t status = load_path(BOARD_FILE);
            ck_assert_msg(status == LSTUB_OK || err.message[0] != '\0', "%s", lstub_status_name(status));
        }
    free(text);
    free(bad);
}
END_TEST

/* ---- memory and patience --------------------------------------------------------------------------- */

START_TEST(out_of_memory)
{
    test_xml        b = board_parts();
    test_memory     memory;
    lstub_allocator allocator = test_allocator(&memory);
    lstub_rules    *rules = NULL;
    lstub_board    *board = NULL;
    static const char text[] = "returns G within 3 mm\npair _P _N\ndefault antipad 1 mm";
    b.step = "<Component refDes=\"U1\" layerRef=\"TOP\"/><PadStackDef name=\"VIA\"><PadstackHoleDef name=\"H\" diameter=\"{0.3}\" platingStatus=\"VIA\"/>"
             "<PadstackPadDef layerRef=\"TOP\"><Circle diameter=\"{0.6}\"/></PadstackPadDef></PadStackDef>";
    write_board(&b);
    ck_assert_int_eq(lstub_rules_parse(text, sizeof text - 1, NULL, &rules, NULL), LSTUB_OK);
    for (long fail = 1;; fail++) {
        memory = (test_memory){0, 0, fail};
        LSTUB_INIT(err);
        int32_t status = lstub_board_load(BOARD_FILE, rules, NULL, &allocator, &board, &err);
        if (status == LSTUB_OK)
            break;
        ck_assert_msg(status == LSTUB_E_MEMORY, "call %ld: %s: %s", fail, lstub_status_name(status), err.message);
        ck_assert_int_eq(memory.live, 0);
        ck_assert_ptr_null(board);
        ck_assert_int_lt(fail, 5000);
    }
    lstub_board_destroy(board);
    ck_assert_int_eq(memory.live, 0);
    lstub_rules_destroy(rules);
}
END_TEST

typedef struct patience {
    double last;
    int    calls, most;
} patience;

static int32_t watch(void *user, double fraction)
{
    patience *p = user;
    ck_assert(fraction >= p->last && fraction <= 1.0);
    p->last = fraction;
    return ++p->calls > p->most;
}

START_TEST(progress)
{
    test_xml            b = board_parts();
    lstub_board_options options;
    patience            p = {0.0, 0, 1000000};
    lstub_board        *board = NULL;
    LSTUB_INIT(options);
    options.progress = watch;
    options.progress_user = &p;
    board = load_with(&b, NULL, &options);
    lstub_board_destroy(board);
    ck_assert_int_ge(p.calls, 2);
    board = NULL;
    p = (patience){0.0, 0, 1};
    assert_refused(lstub_board_load(BOARD_FILE, NULL, &options, NULL, &board, &err), LSTUB_E_READ, err, "given up");
    ck_assert_ptr_null(board);
}
END_TEST

int main(void)
{
    Suite *suite = suite_create("ipc2581 hostile");
    TCase *tests = tcase_create("hostile");
    tcase_set_timeout(tests, 120);
    tcase_add_test(tests, no_file);
    tcase_add_test(tests, indexes);
    tcase_add_loop_test(tests, not_boards, 0, (int)COUNT(texts));
    tcase_add_loop_test(tests, bad_values, 0, (int)COUNT(values));
    tcase_add_test(tests, nesting);
    tcase_add_test(tests, long_values);
    tcase_add_test(tests, long_names);
    tcase_add_test(tests, cut_short);
    tcase_add_test(tests, spoilt);
    tcase_add_test(tests, spoilt_structure);
    tcase_add_test(tests, out_of_memory);
    tcase_add_test(tests, progress);
    suite_add_tcase(suite, tests);
    return test_main(suite);
}
