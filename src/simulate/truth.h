/* SPDX-License-Identifier: GPL-3.0-or-later
 * Building JSON: a failure latches in *ok, and every value is given away. */
#ifndef CE_SIMULATE_TRUTH_H
#define CE_SIMULATE_TRUTH_H

#include <chainend/simulate.h>

#include <jansson.h>

/* null unless finite: JSON has no NaN. */
json_t *ce_truth_number(double x);
void ce_truth_set(json_t *object, const char *key, json_t *value, bool *ok);
void ce_truth_append(json_t *array, json_t *value, bool *ok);
json_t *ce_truth_ramp(const ce_ramp_truth *ramp, bool *ok);
/* As text: 64 bits do not fit a JSON number that other readers keep exact. */
json_t *ce_truth_seed(uint64_t seed);
json_t *ce_truth_config(const ce_simulation_config *config, bool *ok);
/* Text of root, which is given away, with a newline at the end; the caller's to free(). */
ce_status ce_truth_text(json_t *root, bool ok, char **json, ce_error *err);

#endif
