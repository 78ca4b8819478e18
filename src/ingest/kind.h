/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file kind.h  What kind of file it is, told by how it begins. Pure functions. */
#ifndef ROUTEFADE_INGEST_KIND_H
#define ROUTEFADE_INGEST_KIND_H

#include "ingest/column_map_parts.h"

struct rfade_other_kind {
    const char *what;   /**< "an XLSX workbook or ZIP archive"; NULL: may be a log */
    const char *remedy; /**< what to do instead */
};

/** Looks at the first bytes, whatever the file is called. */
struct rfade_other_kind rfade_other_kind(const char *head, size_t size);

/** How a file that may be a log is to be read. */
enum rfade_log_format rfade_log_format_of(const char *head, size_t size);

#endif
