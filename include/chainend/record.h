/* SPDX-License-Identifier: GPL-3.0-or-later
 * A saved calibration: everything an answer depends on, as JSON (schema chainend.calibration/1), read
 * back strictly. A fit read back gives the same digits as the fit itself. */
#ifndef CHAINEND_RECORD_H
#define CHAINEND_RECORD_H

#include <chainend/base.h>
#include <chainend/fit.h>
#include <chainend/series.h>

#ifdef __cplusplus
extern "C" {
#endif

/* One input file as it was when the calibration was made. */
typedef struct {
    char *path; /* as it was named                                        */
    size_t bytes;
    char sha256[65]; /* lower-case hexadecimal, FIPS 180-4                     */
} ce_checksum;

/* ce_checksum_file - size and SHA-256 of a regular file.
 *   out  checksum   path is the caller's to free(); zeroed unless CE_OK
 *   ret  CE_OK | CE_E_IO | CE_E_NOMEM */
CE_API ce_status ce_checksum_file(const char *path, ce_checksum *checksum, ce_error *err);

/* Checksums of a series file and of every run it names, each once, in order of first appearance.
 *   out  list, n   the caller's, to be freed with ce_checksums_free()
 *   ret  CE_OK | CE_E_IO (a file cannot be read again) | CE_E_NOMEM */
CE_API ce_status ce_checksum_series(const ce_series *series, ce_checksum **list, size_t *n,
                                    ce_error *err);
CE_API void ce_checksums_free(ce_checksum *list, size_t n);

/* A record read back. Release with ce_record_free(). */
typedef struct {
    char *made_by; /* "chainend 0.1.0"                                                     */
    ce_window glass, liquid; /* windows given for all runs; NaN = chosen by run             */
    ce_series series;        /* settings, rows and samples as evaluated                     */
    ce_fit fit;
    size_t n_files;
    ce_checksum *file;
} ce_record;

/* ce_record_text - the record of a fitted series.
 *   in   series, fit    as evaluated and fitted
 *        glass, liquid  windows that were given for all runs; NaN limits = none
 *        file           n_files checksums, ce_checksum_series()
 *   out  json           the caller's to free(), UTF-8, newline at the end
 *   ret  CE_OK | CE_E_DOMAIN (a fit that ce_record_read() would refuse: not finite) | CE_E_NOMEM */
CE_API ce_status ce_record_text(const ce_series *series, const ce_fit *fit, ce_window glass,
                                ce_window liquid, const ce_checksum *file, size_t n_files,
                                char **json, ce_error *err);

/* ce_record_read - a record from memory.
 *   in   name   for messages
 *   out  record zeroed unless CE_OK
 *   ret  CE_OK | CE_E_SYNTAX (not JSON: line and column; another schema; a member that is missing,
 *        unknown or of another kind: the message begins with its path, such as "$.fit.parameters[1].u")
 *        | CE_E_DOMAIN (members that contradict each other, a covariance that is not positive
 *        definite) | CE_E_NOMEM */
CE_API ce_status ce_record_read(const void *bytes, size_t n, const char *name, ce_record *record,
                                ce_error *err);
CE_API void ce_record_free(ce_record *record);
/* Does this text claim to be a record: is its first character that is no blank a '{'? */
CE_API bool ce_record_is(const void *bytes, size_t n);

#ifdef __cplusplus
}
#endif
#endif
