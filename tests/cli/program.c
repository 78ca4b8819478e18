/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "program.h"

#include <setjmp.h>
#include <stdarg.h>
#include <stdint.h>

#include <cmocka.h>
#include <fcntl.h>
#include <ftw.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/types.h>
#include <sys/wait.h>
#include <unistd.h>

enum { MAX_ARGUMENTS = 64 };

/* In the child: standard input, output and error as wanted, then the program. */
static void become_program(const struct program *program, FILE *input, FILE *output,
                           FILE *errors, char *const *arguments)
{
    int out = fileno(output);
    const char *path = program->output_path ? program->output_path : "";
    int ends[2] = {-1, -1};
    if (strcmp(path, "|") == 0 && pipe(ends) == 0) {
        (void)close(ends[0]);
        out = ends[1];
    } else if (path[0] == '/') {
        out = open(path, O_WRONLY);
    }
    (void)unsetenv("ROUTEFADE_SURVEY");
    if (dup2(fileno(input), STDIN_FILENO) < 0 || dup2(out, STDOUT_FILENO) < 0 ||
        dup2(fileno(errors), STDERR_FILENO) < 0)
        _exit(126);
    if (strcmp(path, "-") == 0)
        (void)close(STDOUT_FILENO);
    (void)execv(ROUTEFADE_PROGRAM, arguments);
    _exit(127);
}

static char *whole_text(FILE *stream)
{
    assert_int_equal(fseek(stream, 0, SEEK_END), 0);
    long size = ftell(stream);
    assert_true(size >= 0);
    rewind(stream);
    char *text = malloc((size_t)size + 1);
    assert_non_null(text);
    assert_int_equal(fread(text, 1, (size_t)size, stream), (size_t)size);
    text[size] = '\0';
    return text;
}

void program_run(struct program *program, const char *const *arguments)
{
    char *vector[MAX_ARGUMENTS] = {strdup(ROUTEFADE_PROGRAM)};
    size_t count = 1;
    for (; arguments[count - 1]; count++) {
        assert_true(count < MAX_ARGUMENTS - 1);
        vector[count] = strdup(arguments[count - 1]);
    }
    FILE *input = tmpfile(), *output = tmpfile(), *errors = tmpfile();
    assert_true(input && output && errors);
    if (program->input)
        (void)fputs(program->input, input);
    assert_int_equal(fflush(input), 0);
    rewind(input);
    pid_t child = fork();
    assert_true(child >= 0);
    if (child == 0)
        become_program(program, input, output, errors, vector);
    int state = 0;
    assert_int_equal(waitpid(child, &state, 0), child);
    program->status = WIFEXITED(state) ? WEXITSTATUS(state) : -1;
    free(program->output);
    free(program->errors);
    program->output = whole_text(output);
    program->errors = whole_text(errors);
    (void)fclose(input);
    (void)fclose(output);
    (void)fclose(errors);
    for (size_t i = 0; i < count; i++)
        free(vector[i]);
}

void program_clear(struct program *program)
{
    free(program->output);
    free(program->errors);
    *program = (struct program){0};
}

void assert_input_refused(const char *input, int status, const char *part,
                          const char *const *arguments)
{
    struct program program = {.input = input};
    program_run(&program, arguments);
    if (program.status != status || !strstr(program.errors, part))
        print_error("wanted %d and '%s', got %d and %s", status, part, program.status,
                    program.errors);
    assert_int_equal(program.status, status);
    assert_string_equal(program.output, "");
    assert_int_equal(strncmp(program.errors, "routefade: ", 11), 0);
    assert_non_null(strstr(program.errors, part));
    assert_ptr_equal(strchr(program.errors, '\n'), program.errors + strlen(program.errors) - 1);
    program_clear(&program);
}

char *output_of(const char *const *arguments)
{
    struct program program = {0};
    program_run(&program, arguments);
    assert_string_equal(program.errors, "");
    assert_int_equal(program.status, 0);
    char *output = program.output;
    program.output = NULL;
    program_clear(&program);
    return output;
}

void assert_done(const char *const *arguments)
{
    free(output_of(arguments));
}

json_t *json_of(const char *const *arguments)
{
    char *output = output_of(arguments);
    json_t *value = json_loads(output, 0, NULL);
    assert_non_null(value);
    free(output);
    return value;
}

double number_of(const json_t *object, const char *name)
{
    const json_t *value = json_object_get(object, name);
    return json_is_number(value) ? json_number_value(value) : NAN;
}

double number_at(const json_t *rows, size_t row, const char *name)
{
    return number_of(json_array_get(rows, row), name);
}

const char *text_of(const json_t *object, const char *name)
{
    const char *text = json_string_value(json_object_get(object, name));
    return text ? text : "";
}

const char *text_at(const json_t *rows, size_t row, const char *name)
{
    return text_of(json_array_get(rows, row), name);
}

void assert_refused(int status, const char *part, const char *const *arguments)
{
    assert_input_refused(NULL, status, part, arguments);
}

const char *folder_create(void)
{
    static char path[64];
    (void)strcpy(path, "/tmp/routefade_test_XXXXXX");
    assert_non_null(mkdtemp(path));
    return path;
}

static int remove_entry(const char *path, const struct stat *status, int type,
                        struct FTW *place)
{
    (void)status;
    (void)type;
    (void)place;
    return remove(path);
}

void folder_remove(const char *path)
{
    (void)nftw(path, remove_entry, 16, FTW_DEPTH | FTW_PHYS);
}

const char *file_create(const char *folder, const char *name, const char *text)
{
    static char path[512];
    (void)snprintf(path, sizeof path, "%s/%s", folder, name);
    FILE *file = fopen(path, "w");
    assert_non_null(file);
    assert_true(fputs(text, file) >= 0);
    assert_int_equal(fclose(file), 0);
    return path;
}

char *file_text(const char *path)
{
    FILE *file = fopen(path, "r");
    assert_non_null(file);
    char *text = whole_text(file);
    (void)fclose(file);
    return text;
}
