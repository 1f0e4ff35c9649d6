/* SPDX-License-Identifier: GPL-3.0-or-later
 * Bytes from a file or standard input, and what they say as UTF-8 text. */
#ifndef CE_TEXT_LOAD_H
#define CE_TEXT_LOAD_H

#include <chainend/base.h>

#include <stdbool.h>
#include <sys/stat.h>

/* Longest line taken, in bytes: a file without line ends is found out before it fills memory. */
#define CE_MAX_LINE ((size_t)4 << 20)

/* data has a NUL after its n bytes. */
typedef struct {
    char *data;
    size_t n;
} ce_bytes;

/* Read a file whole; "-" is standard input. Directories, FIFOs and devices are refused, so is a
 * file that changes meanwhile. CE_OK | CE_E_IO | CE_E_LIMIT | CE_E_NOMEM; bytes->data is the
 * caller's to free() and NULL unless CE_OK. */
ce_status ce_bytes_load(const char *path, size_t max, ce_bytes *bytes, ce_error *err);
/* The same from an open descriptor; before is its fstat() from before, NULL when it may not stand
 * still (a pipe). */
ce_status ce_bytes_read(int fd, const struct stat *before, const char *name, size_t max,
                        ce_bytes *bytes, ce_error *err);

typedef struct {
    char *memory;         /* owned                                                   */
    char *begin, *end;    /* the text, without byte order mark; *end is NUL          */
    const char *encoding; /* "ASCII", "UTF-8", "UTF-16LE", "Windows-1252" ...; borrowed from the
                             caller when it was given */
    bool mark;            /* a byte order mark said so                               */
    bool guessed;         /* nothing said so                                         */
} ce_text;

/* Decode bytes, which are consumed (freed or taken over) in any case. encoding NULL = find out:
 * byte order mark, then UTF-16 by its NULs, ASCII, UTF-8, else Windows-1252. The text holds no
 * control bytes but tab and line ends. CE_OK | CE_E_SYNTAX (with line and column, the column
 * counting characters) | CE_E_ARG (no such encoding) | CE_E_NOMEM */
ce_status ce_text_decode(ce_bytes *bytes, const char *name, const char *encoding, ce_text *text,
                         ce_error *err);
void ce_text_free(ce_text *text);

/* Where the line that begins at p ends (at its CR or LF, or at end), and where the next begins. */
const char *ce_line_end(const char *p, const char *end);
static inline const char *ce_line_next(const char *line_end, const char *end)
{
    if (line_end == end) return end;
    return line_end + 1 + (line_end[0] == '\r' && line_end + 1 < end && line_end[1] == '\n');
}

#endif
