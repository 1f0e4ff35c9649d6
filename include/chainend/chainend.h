/* SPDX-License-Identifier: GPL-3.0-or-later
 * libchainend: molar mass from a glass transition measured by DSC.
 *
 * The library never prints, never exits and never changes global state. It calls GSL, whose default
 * error handler aborts the process: a caller must switch it off once, from its main thread, with
 * gsl_set_error_handler_off() or install a handler that returns.
 *
 * Inside, temperatures are kelvin, times seconds, rates K/min, molar masses g/mol, sample masses
 * gram; heat flow is endothermic up. Logarithms are natural unless the name says log10. */
#ifndef CHAINEND_CHAINEND_H
#define CHAINEND_CHAINEND_H

#include <chainend/base.h>
#include <chainend/estimate.h>
#include <chainend/fit.h>
#include <chainend/record.h>
#include <chainend/run.h>
#include <chainend/series.h>
#include <chainend/transition.h>
#include <chainend/version.h>

#endif
