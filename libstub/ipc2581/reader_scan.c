/* Pass 1: everything but the features. */
#include "ipc2581/reader.h"

#include <string.h>

static void on_start(lstub__xml *xml, int element, const char **a)
{
    reader *r = xml->user;
    if (element == EL_IPC_2581) {
        const char *revision = lstub__xml_text(a, "revision");
        if (strcmp(revision, "B") != 0 && strcmp(revision, "C") != 0)
            lstub__note(&r->notices, LSTUB_NOTICE_WARNING, NOTE_REVISION, 0, lstub__xml_line(xml),
                        "revision '%.20s' of IPC-2581: read as revision C", revision);
        return;
    }
    if (element == EL_OTHER) {
        lstub__xml_skip(xml);
        return;
    }
    if (r->layer < 0 && lstub__dict_start(r, xml, element, a))
        return;
    if (r->layer < 0 && r->step < 0 && (lstub__spec_start(r, xml, element, a) || lstub__layers_start(r, xml, element, a)))
        return;
    lstub__holes_start(r, xml, element, a);
}

static void on_end(lstub__xml *xml, int element)
{
    reader *r = xml->user;
    if (r->layer < 0) {
        lstub__dict_end(r, xml, element);
        lstub__spec_end(r, element);
        lstub__layers_end(r, element);
    }
    lstub__holes_end(r, xml, element);
}

int32_t lstub__reader_scan(reader *r, const char *path)
{
    lstub__xml xml = {0};
    xml.start = on_start;
    xml.end = on_end;
    xml.user = r;
    xml.err = r->err;
    xml.progress = r->options->progress;
    xml.progress_user = r->options->progress_user;
    xml.progress_to = 0.5;
    int32_t status = lstub__xml_read(&xml, path);
    if (status < 0)
        return status;
    r->board->source_crc = xml.crc;
    r->board->source_bytes = xml.bytes;
    r->board->unit = r->unit;
    if (r->unit == 0.0)
        return lstub__fail(r->err, LSTUB_E_FORMAT, "units", -1, "no CadHeader with units in the file");
    if (xml.holes > r->holes_used)
        lstub__note(&r->notices, LSTUB_NOTICE_REFUSED, NOTE_OUTSIDE, 0, -1, "%ld Hole elements outside the Sets of drill layers: not used",
                    (long)(xml.holes - r->holes_used));
    lstub__dict_finish(r);
    return LSTUB_OK;
}
