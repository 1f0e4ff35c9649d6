/* SPDX-License-Identifier: GPL-3.0-or-later
 * Options of the simulator: glass, programme, instrument, layout, and the samples of a series. */
#ifndef CE_CLI_SIMULATING_H
#define CE_CLI_SIMULATING_H

#include <chainend/fit.h>
#include <chainend/simulate.h>

#include "cli/cli.h"
#include "cli/reading.h"

#define CLI_MAX_STEPS   64
#define CLI_MAX_SAMPLES 200
#define CLI_MAX_LAYOUTS 8

/* What the options fill in; borrowed strings live as long as argv. */
typedef struct {
    ce_simulation_config config;
    ce_programme_step step[CLI_MAX_STEPS];
    bool ramped;        /* a programme was given                                               */
    double tg_K;        /* of the glass: relaxation time of 100 s; NaN = as the parameters say */
    const char *second; /* TG:SHARE of a second glass                                          */
    size_t n_layouts;
    ce_layout layout[CLI_MAX_LAYOUTS]; /* used in turn                                            */
    /* series */
    ce_series_plan plan;
    ce_sample_plan sample[CLI_MAX_SAMPLES];
    char *name[CLI_MAX_SAMPLES]; /* owned */
    ce_relation relation;
    double theta[CE_MAX_PARAMETERS];
    size_t n_theta;
    const char *polymer, *scope;
    bool bare;
} cli_simulating;

cli_simulating cli_simulating_default(void);
/* Settle what depends on several options. CE_OK or CE_E_ARG. */
ce_status cli_simulating_settle(cli_simulating *s, ce_error *err);
void cli_simulating_free(cli_simulating *s);

ce_status cli_set_material(void *to, const char *value, ce_error *err);
ce_status cli_set_kelvin(void *to, const char *value, ce_error *err);
ce_status cli_set_seconds(void *to, const char *value, ce_error *err);
ce_status cli_set_power(void *to, const char *value, ce_error *err);
ce_status cli_add_ramp(void *to, const char *value, ce_error *err);
ce_status cli_add_hold(void *to, const char *value, ce_error *err);
ce_status cli_add_peak(void *to, const char *value, ce_error *err);
ce_status cli_set_transient(void *to, const char *value, ce_error *err);
ce_status cli_set_gram(void *to, const char *value, ce_error *err);
ce_status cli_set_seed(void *to, const char *value, ce_error *err);
ce_status cli_add_layouts(void *to, const char *value, ce_error *err);
/* These change the layouts named so far. */
ce_status cli_set_last_heating_only(void *to, const char *value, ce_error *err);
ce_status cli_set_hidden_sign(void *to, const char *value, ce_error *err);
ce_status cli_set_layout_sign(void *to, const char *value, ce_error *err);
ce_status cli_set_layout_delimiter(void *to, const char *value, ce_error *err);
ce_status cli_set_layout_decimal(void *to, const char *value, ce_error *err);
ce_status cli_set_encoding(void *to, const char *value, ce_error *err);
ce_status cli_set_time_unit(void *to, const char *value, ce_error *err);
ce_status cli_set_temperature_unit(void *to, const char *value, ce_error *err);
ce_status cli_set_signal_unit(void *to, const char *value, ce_error *err);

ce_status cli_set_prior_age(void *to, const char *value, ce_error *err);
ce_status cli_add_standard(void *to, const char *value, ce_error *err);
ce_status cli_add_unknown(void *to, const char *value, ce_error *err);
ce_status cli_add_control(void *to, const char *value, ce_error *err);
ce_status cli_set_parameters(void *to, const char *value, ce_error *err);
ce_status cli_set_fraction(void *to, const char *value, ce_error *err);
ce_status cli_set_anchor(void *to, const char *value, ce_error *err);
ce_status cli_set_sim_relation(void *to, const char *value, ce_error *err);

/* clang-format off */
#define CLI_GLASS_OPTIONS(s)                                                                                            \
    {.name = "material", .argument = "NAME", .help = "published relaxation parameters: pvac, ps, pmma (default), pc, pvc, b2o3, as2se3", \
     .kind = CLI_CALL, .to = (s), .call = cli_set_material},                                                            \
    {.name = "tg", .argument = "T", .help = "move the glass: its relaxation time is 100 s at this temperature",         \
     .kind = CLI_CALL, .to = &(s)->tg_K, .call = cli_set_kelvin},                                                       \
    {.name = "ln-a", .argument = "X", .help = "ln of the pre-exponential time in seconds",                              \
     .kind = CLI_NUMBER, .to = &(s)->config.glass[0].ln_a, .low = -1e300, .high = 1e300},                               \
    {.name = "h", .argument = "KELVIN", .help = "activation enthalpy over R",                                           \
     .kind = CLI_NUMBER, .to = &(s)->config.glass[0].h_K, .low = -1e300, .high = 1e300},                                \
    {.name = "x", .argument = "X", .help = "non-linearity, 0 to 1",                                                     \
     .kind = CLI_NUMBER, .to = &(s)->config.glass[0].x, .low = -1e300, .high = 1e300},                                  \
    {.name = "beta", .argument = "X", .help = "stretching exponent, 0 to 1",                                            \
     .kind = CLI_NUMBER, .to = &(s)->config.glass[0].beta, .low = -1e300, .high = 1e300},                               \
    {.name = "reference", .argument = "T", .help = "temperature the heat-capacity lines are anchored at (default 100 °C)",             \
     .kind = CLI_CALL, .to = &(s)->config.glass[0].ref_K, .call = cli_set_kelvin},                                      \
    {.name = "cp-glass", .argument = "CP", .help = "heat capacity of the glass there, J/(g K) (default 1.6)",                         \
     .kind = CLI_NUMBER, .to = &(s)->config.glass[0].cp_glass, .low = -1e300, .high = 1e300},                           \
    {.name = "slope-glass", .argument = "X", .help = "its slope, J/(g K^2) (default 0.0035)",                                            \
     .kind = CLI_NUMBER, .to = &(s)->config.glass[0].slope_glass, .low = -1e300, .high = 1e300},                        \
    {.name = "step", .argument = "CP", .help = "step height there, J/(g K) (default 0.30)",                                            \
     .kind = CLI_NUMBER, .to = &(s)->config.glass[0].step, .low = -1e300, .high = 1e300},                               \
    {.name = "slope-step", .argument = "X", .help = "slope of the step height, J/(g K^2) (default -0.001)",                              \
     .kind = CLI_NUMBER, .to = &(s)->config.glass[0].slope_step, .low = -1e300, .high = 1e300},                         \
    {.name = "second", .argument = "T:SHARE", .help = "a second glass of a blend: its Tg and its mass fraction",        \
     .kind = CLI_TEXT, .to = &(s)->second}

#define CLI_PROGRAMME_OPTIONS(s)                                                                                        \
    {.name = "start", .argument = "T", .help = "where the programme starts (°C where no unit stands)",                  \
     .kind = CLI_CALL, .to = &(s)->config.programme.start_K, .call = cli_set_kelvin},                                   \
    {.name = "ramp", .argument = "T@RATE", .help = "then a ramp to T, e.g. 20C@10K/min; may be given several times",    \
     .kind = CLI_CALL, .to = (s), .call = cli_add_ramp},                                                                \
    {.name = "hold", .argument = "TIME", .help = "then a hold, e.g. 5min; ramps and holds follow one another as given", \
     .kind = CLI_CALL, .to = (s), .call = cli_add_hold},                                                                \
    {.name = "prior-rate", .argument = "RATE", .help = "cooling rate before the start, e.g. 40K/min (default 10)",     \
     .kind = CLI_CALL, .to = &(s)->config.programme.prior_rate_K_min, .call = cli_set_rate},                            \
    {.name = "prior-age", .argument = "T:TIME", .help = "then aged at T for TIME before the start, e.g. 70C:48h",      \
     .kind = CLI_CALL, .to = &(s)->config.programme, .call = cli_set_prior_age},                                        \
    {.name = "max-step", .argument = "KELVIN", .help = "temperature step of the integration (default 0.1)",             \
     .kind = CLI_NUMBER, .to = &(s)->config.max_step_K, .low = -1e300, .high = 1e300}

#define CLI_INSTRUMENT_OPTIONS(s)                                                                                       \
    {.name = "mass", .argument = "MASS", .help = "sample mass (default 10 mg)",                                         \
     .kind = CLI_CALL, .to = &(s)->config.instrument.mass_g, .call = cli_set_gram},                                     \
    {.name = "interval", .argument = "TIME", .help = "time between points (default 0.6 s)",                             \
     .kind = CLI_CALL, .to = &(s)->config.instrument.interval_s, .call = cli_set_seconds},                              \
    {.name = "noise", .argument = "POWER", .help = "standard deviation of a point, e.g. 5uW",                           \
     .kind = CLI_CALL, .to = &(s)->config.instrument.noise_mW, .call = cli_set_power},                                  \
    {.name = "noise-time", .argument = "TIME", .help = "correlation time of the noise (default: white)",                \
     .kind = CLI_CALL, .to = &(s)->config.instrument.noise_time_s, .call = cli_set_seconds},                            \
    {.name = "temperature-noise", .argument = "KELVIN", .help = "standard deviation of a recorded temperature",         \
     .kind = CLI_NUMBER, .to = &(s)->config.instrument.temperature_noise_K, .low = -1e300, .high = 1e300},              \
    {.name = "temperature-offset", .argument = "KELVIN", .help = "recorded minus true temperature",                     \
     .kind = CLI_NUMBER, .to = &(s)->config.instrument.temperature_offset_K, .low = -1e300, .high = 1e300},             \
    {.name = "offset", .argument = "POWER", .help = "zero of the signal",                                               \
     .kind = CLI_CALL, .to = &(s)->config.instrument.offset_mW, .call = cli_set_power},                                 \
    {.name = "drift", .argument = "POWER", .help = "drift of the zero in a minute",                                     \
     .kind = CLI_CALL, .to = &(s)->config.instrument.drift_mW_min, .call = cli_set_power},                              \
    {.name = "transient", .argument = "POWER:TIME", .help = "start-up transient and its time constant, e.g. 0.5mW:15s", \
     .kind = CLI_CALL, .to = &(s)->config.instrument, .call = cli_set_transient},                                       \
    {.name = "lag", .argument = "TIME", .help = "thermal lag, first-order",                                             \
     .kind = CLI_CALL, .to = &(s)->config.instrument.lag_s, .call = cli_set_seconds},                                   \
    {.name = "peak", .argument = "T:WIDTH:HEAT", .help = "melting (heat above zero, J/g) or cold crystallisation "      \
     "(below) on heating; may be given several times", .kind = CLI_CALL, .to = &(s)->config, .call = cli_add_peak},     \
    {.name = "seed", .argument = "N", .help = "of everything random (default 1)",                                       \
     .kind = CLI_CALL, .to = (s), .call = cli_set_seed}

#define CLI_LAYOUT_OPTIONS(s)                                                                                           \
    {.name = "layout", .argument = "NAMES", .help = "comma (default), semicolon, tab or blanks; several are used "       \
     "in turn", .kind = CLI_CALL, .to = (s), .call = cli_add_layouts},                           \
    {.name = "last-heating-only", .help = "in the layouts named so far, leave out what was recorded before the last heating", \
     .kind = CLI_CALL, .to = (s), .call = cli_set_last_heating_only},                                                   \
    {.name = "hide-sign", .help = "in the layouts named so far, do not name the sign of heat flow",                   \
     .kind = CLI_CALL, .to = (s), .call = cli_set_hidden_sign},                                                         \
    {.name = "sign", .argument = "SIGN", .help = "in the layouts named so far: endo-up or exo-up",                      \
     .kind = CLI_CALL, .to = (s), .call = cli_set_layout_sign},                                                              \
    {.name = "delimiter", .argument = "NAME", .help = "in the layouts named so far: comma, semicolon, tab, pipe or blank", \
     .kind = CLI_CALL, .to = (s), .call = cli_set_layout_delimiter},                                                           \
    {.name = "decimal", .argument = "MARK", .help = "in the layouts named so far: point or comma",                \
     .kind = CLI_CALL, .to = (s), .call = cli_set_layout_decimal},                                                        \
    {.name = "encoding", .argument = "NAME", .help = "in the layouts named so far, e.g. UTF-8-BOM, UTF-16LE, ISO-8859-1", \
     .kind = CLI_CALL, .to = (s), .call = cli_set_encoding},                                                            \
    {.name = "time-unit", .argument = "UNIT", .help = "in the layouts named so far: s or min",                         \
     .kind = CLI_CALL, .to = (s), .call = cli_set_time_unit},                                                           \
    {.name = "temperature-unit", .argument = "UNIT", .help = "in the layouts named so far: C or K",                    \
     .kind = CLI_CALL, .to = (s), .call = cli_set_temperature_unit},                                                    \
    {.name = "signal-unit", .argument = "UNIT", .help = "in the layouts named so far: mW, W/g or 'J/(g K)'",           \
     .kind = CLI_CALL, .to = (s), .call = cli_set_signal_unit}

#define CLI_SAMPLE_OPTIONS(s)                                                                                           \
    {.name = "standard", .argument = "NAME:MN", .help = "a standard with this true Mn, e.g. Q1:20kg/mol",               \
     .kind = CLI_CALL, .to = (s), .call = cli_add_standard},                                                            \
    {.name = "unknown", .argument = "NAME:MN", .help = "an unknown",                                                    \
     .kind = CLI_CALL, .to = (s), .call = cli_add_unknown},                                                             \
    {.name = "control", .argument = "NAME:MN", .help = "a control sample",                                              \
     .kind = CLI_CALL, .to = (s), .call = cli_add_control},                                                             \
    {.name = "runs", .argument = "N", .help = "runs of each sample (default 3)",                                        \
     .kind = CLI_COUNT, .to = &(s)->sample[0].runs, .low = 1, .high = 10000},                                           \
    {.name = "relation", .argument = "NAME", .help = "flory-fox (default) or another of 'chainend fit --help'",         \
     .kind = CLI_CALL, .to = &(s)->relation, .call = cli_set_sim_relation},                                             \
    {.name = "parameters", .argument = "A,B", .help = "its parameters in their order, e.g. 388,180000 (K, K g/mol)",    \
     .kind = CLI_CALL, .to = (s), .call = cli_set_parameters},                                                          \
    {.name = "anchor", .argument = "CONSTRUCTION", .help = "what the relation's Tg is: half_step (default) or fictive", \
     .kind = CLI_CALL, .to = &(s)->plan.anchor, .call = cli_set_anchor},                                                \
    {.name = "mn-u", .argument = "U", .help = "relative standard uncertainty of a certificate, e.g. 5%",                \
     .kind = CLI_CALL, .to = &(s)->plan.mn_u_rel, .call = cli_set_fraction},                                            \
    {.name = "mn-common-u", .argument = "U", .help = "the same, one error shared by all certificates",                  \
     .kind = CLI_CALL, .to = &(s)->plan.mn_common_u_rel, .call = cli_set_fraction},                                     \
    {.name = "run-sd", .argument = "KELVIN", .help = "run-to-run scatter of Tg",                                        \
     .kind = CLI_NUMBER, .to = &(s)->plan.run_sd_K, .low = -1e300, .high = 1e300},                                      \
    {.name = "sample-sd", .argument = "KELVIN", .help = "sample-to-sample scatter of Tg",                               \
     .kind = CLI_NUMBER, .to = &(s)->plan.sample_sd_K, .low = -1e300, .high = 1e300},                                   \
    {.name = "mass-spread", .argument = "U", .help = "half-width of the spread of sample masses, e.g. 20%",             \
     .kind = CLI_CALL, .to = &(s)->plan.mass_spread, .call = cli_set_fraction},                                         \
    {.name = "programme-tg", .argument = "T", .help = "the programme is for a sample with this Tg and moves along "     \
     "with the others'", .kind = CLI_CALL, .to = &(s)->plan.programme_tg_K, .call = cli_set_kelvin},                    \
    {.name = "bare", .help = "bare Tg values instead of run files", .kind = CLI_FLAG, .to = &(s)->bare},                \
    {.name = "polymer", .argument = "WORDS", .help = "setting of the series file",                                      \
     .kind = CLI_TEXT, .to = &(s)->polymer},                                                                            \
    {.name = "scope", .argument = "WORDS", .help = "setting of the series file", .kind = CLI_TEXT, .to = &(s)->scope},  \
    {.name = "threads", .argument = "N", .help = "the result does not depend on it (default 1)",                        \
     .kind = CLI_COUNT, .to = &(s)->plan.threads, .low = 1, .high = 64}
/* clang-format on */

#endif
