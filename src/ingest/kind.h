/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file kind.h  Files that are no delimited text, told by how they begin. Pure function. */
#ifndef ROUTEFADE_INGEST_KIND_H
#define ROUTEFADE_INGEST_KIND_H

#include <stddef.h>

struct rfade_other_kind {
    const char *what;   /**< "an XLSX workbook or ZIP archive"; NULL: may be delimited text */
    const char *remedy; /**< what to do instead */
};

/** Looks at the first bytes, whatever the file is called. */
struct rfade_other_kind rfade_other_kind(const char *head, size_t size);

#endif
