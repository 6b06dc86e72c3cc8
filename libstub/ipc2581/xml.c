#include "ipc2581/xml.h"

#include "base/base.h"
#include "ipc2581/number.h"
#include "ipc2581/text.h"

#include <errno.h>
#include <expat.h>
#include <math.h>
#include <stdarg.h>
#include <stdio.h>
#include <string.h>
#include <zlib.h>

#define CHUNK 65536
#define LENGTH_MAX 100.0   /* m: beyond any board, and far from where squares overflow */

static const char *const element_name[EL_COUNT] = {
    "?",
#define E(constant, name) name,
    LSTUB__ELEMENTS(E)
#undef E
};

/* Prefixes of namespaces are not looked at: the names are distinct without them. */
static int element_of(const char *name)
{
    const char *colon = strchr(name, ':');
    int low = 1, high = EL_COUNT - 1;
    if (colon != NULL)
        name = colon + 1;
    while (low <= high) {
        int middle = (low + high) / 2, order = strcmp(name, element_name[middle]);
        if (order == 0)
            return middle;
        if (order < 0)
            high = middle - 1;
        else
            low = middle + 1;
    }
    return EL_OTHER;
}

/* ---- failures ---------------------------------------------------------------------------------- */

int64_t lstub__xml_line(const lstub__xml *xml)
{
    return (int64_t)XML_GetCurrentLineNumber(xml->parser);
}

void lstub__xml_stop(lstub__xml *xml, int32_t status)
{
    xml->status = status;
    XML_StopParser(xml->parser, XML_FALSE);
}

void lstub__xml_fail(lstub__xml *xml, int32_t status, const char *field, const char *format, ...)
{
    char message[256];
    long line = (long)lstub__xml_line(xml);
    va_list args;
    if (xml->status < 0)
        return;
    va_start(args, format);
    lstub__vformat(message, sizeof message, format, args);
    va_end(args);
    lstub__fail(xml->err, status, field, line, "line %ld: %s", line, message);
    lstub__xml_stop(xml, status);
}

static int32_t fail_read(const lstub__xml *xml, const char *path, const char *what)
{
    return lstub__fail(xml->err, LSTUB_E_READ, "path", -1, "'%s': %s", lstub__path_tail(path), what);
}

/* ---- what expat calls -------------------------------------------------------------------------- */

static int too_long(lstub__xml *xml, const char *name, const char **attributes)
{
    if (XML_GetCurrentByteCount(xml->parser) <= LSTUB__TEXT_MAX)
        return 0;
    int bad = strlen(name) > LSTUB__TEXT_MAX;
    for (int i = 0; !bad && attributes[i] != NULL; i++)
        bad = strlen(attributes[i]) > LSTUB__TEXT_MAX;
    if (bad)
        lstub__xml_fail(xml, LSTUB_E_FORMAT, "path", "<%.40s>: a name or value of more than %d bytes", name, LSTUB__TEXT_MAX);
    return bad;
}

static void on_start(void *user, const char *name, const char **attributes)
{
    lstub__xml *xml = user;
    if (xml->status < 0 || too_long(xml, name, attributes))
        return;
    if (xml->depth == LSTUB__DEPTH_MAX) {
        lstub__xml_fail(xml, LSTUB_E_FORMAT, "path", "<%.40s>: more than %d elements within each other", name, LSTUB__DEPTH_MAX);
        return;
    }
    int element = element_of(name);
    xml->path[xml->depth++] = (unsigned char)element;
    if (xml->depth == 1 && element != EL_IPC_2581)
        lstub__xml_fail(xml, LSTUB_E_FORMAT, "path", "<%.60s>: not a board file: must be <IPC-2581>", name);
    else if (xml->skip == 0)
        xml->start(xml, element, attributes);
    xml->holes += element == EL_HOLE;
}

static void on_end(void *user, const char *name)
{
    lstub__xml *xml = user;
    (void)name;
    if (xml->status < 0)
        return;
    if (xml->skip == xml->depth)
        xml->skip = 0;
    if (xml->skip == 0)
        xml->end(xml, xml->path[xml->depth - 1]);
    xml->depth--;
}

static void on_entity(void *user, const char *name, int parameter, const char *value, int bytes, const char *base,
                      const char *system, const char *public, const char *notation)
{
    (void)parameter; (void)value; (void)bytes; (void)base; (void)system; (void)public; (void)notation;
    lstub__xml_fail(user, LSTUB_E_FORMAT, "path", "entity '%.40s': entity declarations are refused", name);
}

/* ---- reading ----------------------------------------------------------------------------------- */

static int32_t fail_syntax(lstub__xml *xml)
{
    enum XML_Error code = XML_GetErrorCode(xml->parser);
    long line = (long)lstub__xml_line(xml), column = (long)XML_GetCurrentColumnNumber(xml->parser) + 1;
    if (xml->status < 0)
        return xml->status;
    if (code == XML_ERROR_NO_MEMORY)
        return lstub__fail(xml->err, LSTUB_E_MEMORY, "path", line, "line %ld: out of memory in the XML parser", line);
    if (code == XML_ERROR_NO_ELEMENTS || code == XML_ERROR_UNCLOSED_TOKEN || code == XML_ERROR_PARTIAL_CHAR)
        return lstub__fail(xml->err, LSTUB_E_FORMAT, "path", line, "line %ld: the file ends before its last element does: cut off?", line);
    return lstub__fail(xml->err, LSTUB_E_FORMAT, "path", line, "line %ld, column %ld: not XML: %s", line, column, XML_ErrorString(code));
}

/* An unfinished tag is kept by expat until it ends: it must not grow without bound. */
static int32_t check_token(lstub__xml *xml)
{
    int64_t done = (int64_t)XML_GetCurrentByteIndex(xml->parser);
    long line = (long)lstub__xml_line(xml);
    if (done < 0 || xml->bytes - done <= LSTUB__TOKEN_MAX)
        return LSTUB_OK;
    return lstub__fail(xml->err, LSTUB_E_FORMAT, "path", line, "line %ld: a tag, comment or declaration of more than %d bytes", line,
                       LSTUB__TOKEN_MAX);
}

static int32_t tell_progress(lstub__xml *xml, gzFile file, double size, const char *path)
{
    double part = size > 0.0 ? (double)gzoffset(file) / size : 1.0;
    double fraction = xml->progress_from + (xml->progress_to - xml->progress_from) * (part < 1.0 ? part : 1.0);
    if (xml->progress(xml->progress_user, fraction) != 0)
        return fail_read(xml, path, "given up: the progress function said so");
    return LSTUB_OK;
}

static double size_of_file(const char *path)
{
    FILE *file = fopen(path, "rb");
    double size = 0.0;
    if (file == NULL)
        return 0.0;
    if (fseek(file, 0, SEEK_END) == 0)
        size = (double)ftell(file);
    fclose(file);
    return size;
}

static int32_t pump(lstub__xml *xml, gzFile file, const char *path)
{
    double size = xml->progress != NULL ? size_of_file(path) : 0.0;
    for (int count = 0;; count++) {
        void *room = XML_GetBuffer(xml->parser, CHUNK);
        if (room == NULL)
            return lstub__fail(xml->err, LSTUB_E_MEMORY, "path", -1, "out of memory in the XML parser");
        int got = gzread(file, room, CHUNK), code = Z_OK;
        if (got < CHUNK) {
            const char *what = gzerror(file, &code);    /* "path: what" */
            if (strncmp(what, path, strlen(path)) == 0 && what[strlen(path)] == ':')      /* zlib begins with the path */
                what += strlen(path) + 2;
            if (got < 0 || code == Z_BUF_ERROR)
                return fail_read(xml, path, code == Z_BUF_ERROR ? "the compressed data end too early: cut off?"
                                            : code == Z_ERRNO   ? "cannot be read (is it a file?)" : what);
        }
        xml->crc = (uint32_t)crc32(xml->crc, room, (uInt)got);
        xml->bytes += got;
        if (got == 0 && xml->bytes == 0)
            return lstub__fail(xml->err, LSTUB_E_FORMAT, "path", -1, "'%s': the file is empty", lstub__path_tail(path));
        if (XML_ParseBuffer(xml->parser, got, got == 0) != XML_STATUS_OK)
            return fail_syntax(xml);
        if (got == 0)
            return xml->progress != NULL ? tell_progress(xml, file, size, path) : LSTUB_OK;
        int32_t status = check_token(xml);
        if (status == LSTUB_OK && xml->progress != NULL && count % 8 == 0)
            status = tell_progress(xml, file, size, path);
        if (status < 0)
            return status;
    }
}

static const char *open_reason(int code)
{
    return code == ENOENT ? "there is no such file" : code == EACCES ? "no permission to read it"
         : code == ENOMEM ? "out of memory" : "cannot be opened";
}

int32_t lstub__xml_read(lstub__xml *xml, const char *path)
{
    errno = 0;
    gzFile file = gzopen(path, "rb");
    if (file == NULL)
        return fail_read(xml, path, open_reason(errno));
    gzbuffer(file, CHUNK);
    XML_Parser parser = XML_ParserCreate(NULL);
    if (parser == NULL) {
        gzclose(file);
        return lstub__fail(xml->err, LSTUB_E_MEMORY, "path", -1, "out of memory in the XML parser");
    }
    xml->parser = parser;
    xml->crc = (uint32_t)crc32(0, NULL, 0);
    XML_SetUserData(parser, xml);
    XML_SetElementHandler(parser, on_start, on_end);
    XML_SetEntityDeclHandler(parser, on_entity);
    int32_t status = pump(xml, file, path);
    XML_ParserFree(parser);
    gzclose(file);
    xml->parser = NULL;
    return status;
}

/* ---- for the handlers -------------------------------------------------------------------------- */

void lstub__xml_skip(lstub__xml *xml) { xml->skip = xml->depth; }

int lstub__xml_above(const lstub__xml *xml, int up)
{
    return up < xml->depth ? xml->path[xml->depth - 1 - up] : EL_OTHER;
}

const char *lstub__xml_get(const char **attributes, const char *name)
{
    for (; attributes[0] != NULL; attributes += 2)
        if (strcmp(attributes[0], name) == 0)
            return attributes[1];
    return NULL;
}

const char *lstub__xml_text(const char **attributes, const char *name)
{
    const char *text = lstub__xml_get(attributes, name);
    return text != NULL ? text : "";
}

int lstub__xml_is(const char **attributes, const char *name, const char *value)
{
    return strcmp(lstub__xml_text(attributes, name), value) == 0;
}

int lstub__xml_optional_length(lstub__xml *xml, const char **attributes, const char *name, double unit, double *value)
{
    const char *text = lstub__xml_get(attributes, name);
    double number;
    if (text == NULL)
        return 1;
    const char *element = element_name[lstub__xml_above(xml, 0)];
    if (!lstub__parse_double(text, &number)) {
        lstub__xml_fail(xml, LSTUB_E_FORMAT, name, "<%s> %s = '%.60s': must be a number", element, name, text);
        return 0;
    }
    if (unit > 0.0 && !(fabs(number * unit) <= LENGTH_MAX)) {
        lstub__xml_fail(xml, LSTUB_E_FORMAT, name, "<%s> %s = %.60s: must be within +-%g m", element, name, text, LENGTH_MAX);
        return 0;
    }
    *value = unit > 0.0 ? number * unit : number;
    return 1;
}

int lstub__xml_length(lstub__xml *xml, const char **attributes, const char *name, double unit, double *value)
{
    if (lstub__xml_get(attributes, name) != NULL)
        return lstub__xml_optional_length(xml, attributes, name, unit, value);
    lstub__xml_fail(xml, LSTUB_E_FORMAT, name, "<%s>: the attribute '%s' is missing", element_name[lstub__xml_above(xml, 0)], name);
    return 0;
}

int lstub__xml_optional(lstub__xml *xml, const char **attributes, const char *name, double *value)
{
    return lstub__xml_optional_length(xml, attributes, name, 0.0, value);
}

int lstub__xml_number(lstub__xml *xml, const char **attributes, const char *name, double *value)
{
    return lstub__xml_length(xml, attributes, name, 0.0, value);
}
