/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "common/gpx.h"

#include <expat.h>
#include <limits.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "common/text.h"

enum { KEPT_TEXT = 200, VALUE_SIZE = 64, DEEPEST = 64 };

/* Expat joins a namespace and a name by it. No name holds a blank. */
static const char name_separator = ' ';

struct rfade_gpx {
    XML_Parser parser;
    enum rfade_status (*take)(void *context, const struct rfade_gpx_point *point,
                              struct rfade_error *error);
    void *context;
    struct rfade_error *error;
    enum rfade_status status; /* what stopped the file */
    size_t depth;
    size_t tracks;
    size_t routes;
    bool in_point;
    struct rfade_gpx_point point;
    char *value; /* that character data goes to: time or speed; NULL: none */
    size_t value_size;
    char time[VALUE_SIZE];
    char speed[VALUE_SIZE];
    char text[KEPT_TEXT];
};

bool rfade_gpx_is_gpx(const char *head, size_t size)
{
    static const char tag[] = "<gpx";
    for (size_t i = 0; i + sizeof tag <= size; i++)
        if (memcmp(head + i, tag, sizeof tag - 1) == 0 &&
            strchr(" \t\r\n>", head[i + sizeof tag - 1]) && head[i + sizeof tag - 1])
            return true;
    return false;
}

static void stop(struct rfade_gpx *gpx, enum rfade_status status)
{
    gpx->status = status;
    (void)XML_StopParser(gpx->parser, XML_FALSE);
}

static void refuse(struct rfade_gpx *gpx, const char *what)
{
    stop(gpx, rfade_error_set(gpx->error, RFADE_INPUT, "export the track again as GPX 1.1",
                              "%s", what));
    rfade_error_at(gpx->error, NULL, (size_t)XML_GetCurrentLineNumber(gpx->parser));
}

static const char *local_name(const char *name)
{
    const char *separator = strrchr(name, name_separator);
    return separator ? separator + 1 : name;
}

static double coordinate(const char **attributes, const char *name)
{
    double value = NAN;
    for (size_t i = 0; attributes[i]; i += 2)
        if (strcmp(attributes[i], name) == 0)
            (void)rfade_text_to_double(attributes[i + 1], &value);
    return value;
}

/* Keeps some of the file from the tag on. */
static void keep_text(struct rfade_gpx *gpx)
{
    int offset = 0;
    int size = 0;
    const char *input = XML_GetInputContext(gpx->parser, &offset, &size);
    gpx->point.text = gpx->text;
    gpx->point.text_size = 0;
    if (!input || offset < 0 || offset >= size)
        return;
    size_t left = (size_t)(size - offset);
    gpx->point.text_size = left < sizeof gpx->text ? left : sizeof gpx->text;
    memcpy(gpx->text, input + offset, gpx->point.text_size);
}

static void begin_point(struct rfade_gpx *gpx, enum rfade_gpx_kind kind, size_t number,
                        const char **attributes)
{
    gpx->in_point = true;
    gpx->time[0] = '\0';
    gpx->speed[0] = '\0';
    gpx->point = (struct rfade_gpx_point){
        .kind = kind,
        .number = number,
        .latitude_deg = coordinate(attributes, "lat"),
        .longitude_deg = coordinate(attributes, "lon"),
        .time = gpx->time,
        .line = (size_t)XML_GetCurrentLineNumber(gpx->parser),
    };
    keep_text(gpx);
}

static void begin_value(struct rfade_gpx *gpx, char *value)
{
    gpx->value = value;
    gpx->value_size = 0;
    value[0] = '\0';
}

static void begin_element(void *context, const char *full_name, const char **attributes)
{
    struct rfade_gpx *gpx = context;
    const char *name = local_name(full_name);
    if (gpx->status != RFADE_OK) /* expat may call on a little after it was stopped */
        return;
    if (gpx->depth == 0 && strcmp(name, "gpx") != 0)
        refuse(gpx, "the file is XML, and no GPX");
    if (gpx->depth++ == DEEPEST)
        refuse(gpx, "the XML is nested more than 64 deep");
    gpx->tracks += strcmp(name, "trk") == 0;
    gpx->routes += strcmp(name, "rte") == 0;
    if (gpx->in_point) {
        if (strcmp(name, "time") == 0)
            begin_value(gpx, gpx->time);
        else if (strcmp(name, "speed") == 0)
            begin_value(gpx, gpx->speed);
    } else if (strcmp(name, "trkpt") == 0) {
        begin_point(gpx, RFADE_GPX_TRACK, gpx->tracks, attributes);
    } else if (strcmp(name, "rtept") == 0) {
        begin_point(gpx, RFADE_GPX_ROUTE, gpx->routes, attributes);
    } else if (strcmp(name, "wpt") == 0) {
        begin_point(gpx, RFADE_GPX_WAYPOINT, 0, attributes);
    }
}

static bool is_point(const char *name)
{
    return strcmp(name, "trkpt") == 0 || strcmp(name, "rtept") == 0 || strcmp(name, "wpt") == 0;
}

static void end_element(void *context, const char *full_name)
{
    struct rfade_gpx *gpx = context;
    if (gpx->status != RFADE_OK)
        return;
    gpx->depth--;
    gpx->value = NULL;
    if (!gpx->in_point || !is_point(local_name(full_name)))
        return;
    gpx->in_point = false;
    gpx->point.speed_m_s = NAN;
    (void)rfade_text_to_double(gpx->speed, &gpx->point.speed_m_s);
    enum rfade_status status = gpx->take(gpx->context, &gpx->point, gpx->error);
    if (status != RFADE_OK)
        stop(gpx, status);
}

/* A value that is too long keeps its beginning, which is no time or number. */
static void take_text(void *context, const char *text, int size)
{
    struct rfade_gpx *gpx = context;
    if (!gpx->value || size <= 0)
        return;
    size_t room = VALUE_SIZE - 1 - gpx->value_size;
    size_t kept = (size_t)size < room ? (size_t)size : room;
    memcpy(gpx->value + gpx->value_size, text, kept);
    gpx->value_size += kept;
    gpx->value[gpx->value_size] = '\0';
}

static void refuse_document_type(void *context, const char *name, const char *system,
                                 const char *public, int has_internal_subset)
{
    (void)name;
    (void)system;
    (void)public;
    (void)has_internal_subset;
    refuse(context, "the file has a document type declaration, which GPX never has");
}

struct rfade_gpx *
rfade_gpx_create(enum rfade_status (*take)(void *context, const struct rfade_gpx_point *point,
                                           struct rfade_error *error),
                 void *context)
{
    struct rfade_gpx *gpx = calloc(1, sizeof *gpx);
    XML_Parser parser = gpx ? XML_ParserCreateNS(NULL, name_separator) : NULL;
    if (!parser) {
        free(gpx);
        return NULL;
    }
    gpx->parser = parser;
    gpx->take = take;
    gpx->context = context;
    XML_SetUserData(parser, gpx);
    XML_SetElementHandler(parser, begin_element, end_element);
    XML_SetCharacterDataHandler(parser, take_text);
    XML_SetStartDoctypeDeclHandler(parser, refuse_document_type);
    return gpx;
}

void rfade_gpx_destroy(struct rfade_gpx *gpx)
{
    if (gpx)
        XML_ParserFree(gpx->parser);
    free(gpx);
}

enum rfade_status rfade_gpx_read(struct rfade_gpx *gpx, const char *bytes, size_t size,
                                 bool last, struct rfade_error *error)
{
    gpx->error = error;
    if (size > INT_MAX)
        return rfade_error_no_memory(error);
    if (XML_Parse(gpx->parser, bytes, (int)size, last) == XML_STATUS_OK)
        return RFADE_OK;
    if (gpx->status != RFADE_OK)
        return gpx->status;
    enum XML_Error code = XML_GetErrorCode(gpx->parser);
    if (code == XML_ERROR_NO_MEMORY)
        return rfade_error_no_memory(error);
    (void)rfade_error_set(error, RFADE_INPUT, "fetch the file again, or export it as GPX 1.1",
                          "the XML is damaged or cut off: %s", XML_ErrorString(code));
    rfade_error_at(error, NULL, (size_t)XML_GetCurrentLineNumber(gpx->parser));
    return RFADE_INPUT;
}

bool rfade_gpx_is_cut_off(const struct rfade_gpx *gpx)
{
    enum XML_Error code = XML_GetErrorCode(gpx->parser);
    return gpx->depth > 0 &&
           (code == XML_ERROR_NO_ELEMENTS || code == XML_ERROR_UNCLOSED_TOKEN ||
            code == XML_ERROR_PARTIAL_CHAR || code == XML_ERROR_UNCLOSED_CDATA_SECTION);
}

size_t rfade_gpx_lines(const struct rfade_gpx *gpx)
{
    return (size_t)XML_GetCurrentLineNumber(gpx->parser) -
           (XML_GetCurrentColumnNumber(gpx->parser) == 0);
}
