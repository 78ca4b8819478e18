/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ingest/json_scan.h"

#include <stdlib.h>
#include <string.h>

#include "ingest/json_shape.h"

enum { DEEPEST = 256, KEY_SIZE = 256, LINE_HEAD = 200 };

/* An array or object that is open. */
struct container {
    bool array;
    bool on_path;  /* it stands where the path leads through */
    bool key_next; /* of an object: a key must come, or has come and not its colon */
    bool key_fits; /* the key is the path's next step */
    size_t index;  /* of the array's element */
};

struct rfade_json_scanner {
    struct rfade_line_reader *reader;
    struct rfade_json_path path;
    bool value_a_line;
    bool skipping;  /* the rest of a damaged line */
    bool in_string; /* outside or inside a record */
    bool escaped;   /* the next byte of a string stands for itself */
    bool is_key;    /* the string is a key outside of a record */
    bool in_record; /* bytes are kept */
    bool bare;      /* the record is a number or word: it ends before what follows */
    size_t depth;   /* containers open */
    size_t record_depth;
    size_t line;
    size_t record_line;
    size_t record_size;
    size_t key_size;
    size_t line_head_size;
    const char *bytes; /* at hand */
    size_t left;
    const char *done; /* reason of a record that is complete; empty: it is good */
    struct container open[DEEPEST];
    char key[KEY_SIZE];
    char line_head[LINE_HEAD];
    char record[RFADE_LINE_SIZE + 1];
};

static const char good[] = "";

enum rfade_status rfade_json_scanner_create(struct rfade_line_reader *reader,
                                            const struct rfade_json_path *path,
                                            struct rfade_json_scanner **scanner,
                                            struct rfade_error *error)
{
    static const struct rfade_json_path values;
    static const struct rfade_json_path elements = {1, {{NULL, 0, RFADE_ANY_INDEX}}};
    const char *head = NULL;
    size_t size = 0;
    *scanner = NULL;
    enum rfade_status status = rfade_line_peek(reader, &head, &size, error);
    if (status != RFADE_OK)
        return status;
    struct rfade_json_scanner *made = calloc(1, sizeof *made);
    if (!made)
        return rfade_error_no_memory(error);
    made->reader = reader;
    made->path = path ? *path : rfade_json_is_array(head, size) ? elements : values;
    made->value_a_line = rfade_json_is_value_a_line(head, size);
    made->line = 1;
    *scanner = made;
    return RFADE_OK;
}

void rfade_json_scanner_destroy(struct rfade_json_scanner *scanner)
{
    free(scanner);
}

static void keep(struct rfade_json_scanner *scanner, char byte)
{
    if (scanner->record_size < RFADE_LINE_SIZE)
        scanner->record[scanner->record_size] = byte;
    scanner->record_size++;
}

static void end_record(struct rfade_json_scanner *scanner, const char *reason)
{
    scanner->in_record = false;
    scanner->done = scanner->record_size > RFADE_LINE_SIZE
                        ? "the record is longer than 65534 bytes"
                        : reason;
}

/* Whether the value that begins now stands where the path leads; the first at depth 0. */
static bool is_on_path(const struct rfade_json_scanner *scanner)
{
    if (scanner->depth == 0)
        return true;
    const struct container *top = &scanner->open[scanner->depth - 1];
    if (!top->on_path || scanner->depth > scanner->path.count)
        return false;
    const struct rfade_json_step *step = &scanner->path.steps[scanner->depth - 1];
    if (!top->array)
        return top->key_fits;
    return !step->name && (step->index == RFADE_ANY_INDEX || step->index == top->index);
}

static void begin_value(struct rfade_json_scanner *scanner)
{
    if (scanner->in_record || scanner->depth != scanner->path.count || !is_on_path(scanner))
        return;
    scanner->in_record = true;
    scanner->bare = false;
    scanner->record_depth = scanner->depth;
    scanner->record_line = scanner->line;
    scanner->record_size = 0;
}

/* Each of the following returns NULL, or what is wrong with the file's JSON here. */

static const char *open_container(struct rfade_json_scanner *scanner, char byte)
{
    if (scanner->depth == DEEPEST)
        return "is nested more than 256 deep";
    struct container container = {
        .array = byte == '[', .on_path = is_on_path(scanner), .key_next = byte == '{'};
    begin_value(scanner);
    scanner->open[scanner->depth++] = container;
    if (scanner->in_record)
        keep(scanner, byte);
    return NULL;
}

static const char *close_container(struct rfade_json_scanner *scanner, char byte)
{
    if (scanner->depth == 0 || scanner->open[scanner->depth - 1].array != (byte == ']'))
        return "has a closing bracket too many";
    scanner->depth--;
    if (!scanner->in_record)
        return NULL;
    keep(scanner, byte);
    if (scanner->depth == scanner->record_depth)
        end_record(scanner, good);
    return NULL;
}

static void begin_string(struct rfade_json_scanner *scanner)
{
    const struct container *top =
        scanner->depth > 0 ? &scanner->open[scanner->depth - 1] : NULL;
    scanner->is_key = !scanner->in_record && top && !top->array && top->key_next;
    scanner->key_size = 0;
    if (!scanner->is_key)
        begin_value(scanner);
    if (scanner->in_record)
        keep(scanner, '"');
    scanner->in_string = true;
}

static void end_key(struct rfade_json_scanner *scanner)
{
    struct container *top = &scanner->open[scanner->depth - 1];
    top->key_fits = false;
    if (scanner->depth > scanner->path.count)
        return;
    const struct rfade_json_step *step = &scanner->path.steps[scanner->depth - 1];
    top->key_fits = step->name && scanner->key_size == step->name_size &&
                    memcmp(scanner->key, step->name, step->name_size) == 0;
}

static const char *take_in_string(struct rfade_json_scanner *scanner, char byte)
{
    if (byte == '\n')
        return "has a string that does not end on its line";
    if (scanner->in_record)
        keep(scanner, byte);
    if (scanner->is_key && byte != '"') {
        if (scanner->key_size < KEY_SIZE)
            scanner->key[scanner->key_size] = byte;
        scanner->key_size++;
    }
    bool ends = byte == '"' && !scanner->escaped;
    scanner->escaped = byte == '\\' && !scanner->escaped;
    if (!ends)
        return NULL;
    scanner->in_string = false;
    if (scanner->is_key)
        end_key(scanner);
    else if (scanner->in_record && scanner->depth == scanner->record_depth)
        end_record(scanner, good);
    return NULL;
}

/* A comma or colon outside of strings. */
static void take_sign(struct rfade_json_scanner *scanner, char byte)
{
    if (scanner->depth > 0) {
        struct container *top = &scanner->open[scanner->depth - 1];
        top->key_next = !top->array && byte == ',';
        top->index += byte == ',';
    }
    if (scanner->in_record)
        keep(scanner, byte);
}

static const char *take(struct rfade_json_scanner *scanner, char byte)
{
    if (scanner->in_string)
        return take_in_string(scanner, byte);
    switch (byte) {
    case '{':
    case '[':
        return open_container(scanner, byte);
    case '}':
    case ']':
        return close_container(scanner, byte);
    case '"':
        begin_string(scanner);
        return NULL;
    case ',':
    case ':':
        take_sign(scanner, byte);
        return NULL;
    case ' ':
    case '\t':
    case '\r':
    case '\n':
        if (scanner->in_record)
            keep(scanner, byte);
        return NULL;
    default:
        break;
    }
    bool before = scanner->in_record;
    begin_value(scanner);
    scanner->bare = scanner->bare || (scanner->in_record && !before);
    if (scanner->in_record)
        keep(scanner, byte);
    return NULL;
}

/* A number or word that is a record ends before the byte that can't belong to it. */
static bool ends_bare(const struct rfade_json_scanner *scanner, char byte)
{
    return scanner->in_record && scanner->bare && strchr(" \t\r\n,:]}[{\"", byte) && byte;
}

/* The line at hand is damaged: what was open on it is closed, and it is told as a record. */
static void refuse_line(struct rfade_json_scanner *scanner)
{
    scanner->depth = 0;
    scanner->in_string = false;
    scanner->escaped = false;
    scanner->in_record = false;
    scanner->record_line = scanner->line;
    scanner->record_size = scanner->line_head_size;
    memcpy(scanner->record, scanner->line_head, scanner->line_head_size);
    scanner->done = "the line is not valid JSON";
}

static void keep_line_head(struct rfade_json_scanner *scanner, char byte)
{
    if (byte != '\n' && scanner->line_head_size < LINE_HEAD)
        scanner->line_head[scanner->line_head_size++] = byte;
}

/* Uses up one byte, or a record that ends before it. Returns what is wrong, or NULL. */
static const char *advance(struct rfade_json_scanner *scanner)
{
    char byte = *scanner->bytes;
    if (ends_bare(scanner, byte)) {
        end_record(scanner, good);
        return NULL;
    }
    keep_line_head(scanner, byte);
    const char *wrong = scanner->skipping ? NULL : take(scanner, byte);
    if (byte == '\n') {
        scanner->skipping = false;
        if (scanner->value_a_line && !wrong && scanner->depth > 0)
            wrong = "does not end on its line";
    }
    if (wrong && scanner->value_a_line) {
        refuse_line(scanner);
        scanner->skipping = byte != '\n';
        wrong = NULL;
    }
    if (byte == '\n') {
        scanner->line++;
        scanner->line_head_size = 0;
    }
    scanner->bytes++;
    scanner->left--;
    return wrong;
}

/* Nothing more comes: what is open was cut off. */
static void end_file(struct rfade_json_scanner *scanner)
{
    if (scanner->in_record && scanner->bare && scanner->depth == 0) {
        end_record(scanner, good);
        return;
    }
    if (!scanner->in_record && scanner->depth == 0 && !scanner->in_string)
        return;
    if (!scanner->in_record) {
        scanner->record_line = scanner->line;
        scanner->record_size = scanner->line_head_size;
        memcpy(scanner->record, scanner->line_head, scanner->line_head_size);
    }
    end_record(scanner, "the file stops before its JSON is complete");
    scanner->depth = 0;
    scanner->in_string = false;
}

static void tell(struct rfade_json_scanner *scanner, struct rfade_json_record *record)
{
    size_t size = scanner->record_size;
    bool too_long = size > RFADE_LINE_SIZE;
    if (too_long)
        size = RFADE_LINE_SIZE;
    scanner->record[size] = '\n';
    record->line =
        (struct rfade_line){scanner->record, size, scanner->record_line, true, too_long};
    record->reason = scanner->done == good ? NULL : scanner->done;
    scanner->done = NULL;
}

enum rfade_status rfade_json_next(struct rfade_json_scanner *scanner,
                                  struct rfade_json_record *record, bool *more,
                                  struct rfade_error *error)
{
    *record = (struct rfade_json_record){0};
    while (!scanner->done) {
        if (scanner->left == 0) {
            enum rfade_status status =
                rfade_line_bytes(scanner->reader, &scanner->bytes, &scanner->left, error);
            if (status != RFADE_OK)
                return status;
            if (scanner->left == 0) {
                end_file(scanner);
                break;
            }
        }
        size_t line = scanner->line;
        const char *wrong = advance(scanner);
        if (wrong) {
            (void)rfade_error_set(error, RFADE_INPUT, "fetch the file again from the logger",
                                  "the JSON is damaged: it %s", wrong);
            rfade_error_at(error, NULL, line);
            return RFADE_INPUT;
        }
    }
    *more = scanner->done != NULL;
    if (*more)
        tell(scanner, record);
    return RFADE_OK;
}

size_t rfade_json_lines(const struct rfade_json_scanner *scanner)
{
    return scanner->line - (scanner->line_head_size == 0);
}
