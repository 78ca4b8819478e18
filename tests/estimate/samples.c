/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "estimate/samples.h"

#include <math.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include <cmocka.h>

enum { LINE_LENGTH = 1024, ROWS_MAX = 1000, VALUES_MAX = 100000 };

static FILE *open_reference(const char *folder, const char *name, const char *ending)
{
    char path[LINE_LENGTH];
    snprintf(path, sizeof path, "%s/%s%s%s", ROUTEFADE_REFERENCE_DIR, folder, name, ending);
    FILE *file = fopen(path, "r");
    if (file == NULL) {
        fail_msg("can't read %s", path);
    }
    return file;
}

double *sample_read(const char *name, size_t *count)
{
    FILE *file = open_reference("samples/", name, ".txt");
    double *values = malloc(VALUES_MAX * sizeof *values);
    char line[LINE_LENGTH];
    assert_non_null(values);
    *count = 0;
    while (fgets(line, sizeof line, file) != NULL) {
        if (line[0] != '#') {
            assert_true(*count < VALUES_MAX);
            values[(*count)++] = strtod(line, NULL);
        }
    }
    fclose(file);
    assert_true(*count > 0);
    return values;
}

static void split(char *line, struct reference_row *row)
{
    line[strcspn(line, "\r\n")] = '\0';
    for (int i = 0; i < SAMPLE_FIELDS; i++) {
        size_t length = strcspn(line, "\t");
        snprintf(row->field[i], SAMPLE_FIELD_LENGTH, "%.*s", (int)length, line);
        line += length + (line[length] == '\t' ? 1 : 0);
    }
}

struct reference_row *reference_read(const char *name, size_t *count)
{
    FILE *file = open_reference("", name, "");
    struct reference_row *rows = calloc(ROWS_MAX, sizeof *rows);
    char line[LINE_LENGTH];
    int header = 1;
    assert_non_null(rows);
    *count = 0;
    while (fgets(line, sizeof line, file) != NULL) {
        if (line[0] == '#') {
            continue;
        }
        if (header == 0) {
            assert_true(*count < ROWS_MAX);
            split(line, &rows[(*count)++]);
        }
        header = 0;
    }
    fclose(file);
    assert_true(*count > 0);
    return rows;
}

double reference_number(const struct reference_row *row, int field)
{
    const char *text = row->field[field];
    char *end = NULL;
    if (strcmp(text, "-") == 0) {
        return NAN;
    }
    double value = strtod(text, &end);
    assert_true(end != text && *end == '\0');
    return value;
}
