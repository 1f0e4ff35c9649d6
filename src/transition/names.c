/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <chainend/transition.h>

#include <math.h>
#include <stdio.h>
#include <string.h>

static const char *const constructions[CE_CONSTRUCTIONS] = {"onset",      "midpoint", "half_step",
                                                            "inflection", "end",      "fictive"};

const char *ce_construction_name(ce_construction construction)
{
    return construction < CE_CONSTRUCTIONS ? constructions[construction] : "unknown";
}

ce_construction ce_construction_find(const char *name)
{
    ce_construction c = CE_ONSET;
    while (c < CE_CONSTRUCTIONS && strcmp(name, constructions[c]) != 0) c++;
    return c;
}

/* Name of each flag, and the sentence its number goes into. */
static const struct {
    const char *name, *sentence;
} flags[CE_FLAGS] = {
    [CE_FLAG_OVERSHOOT] =
        {"overshoot", "enthalpy recovery overshoots by %.2g step heights: onset and half-step say "
                      "little about the glass, prefer fictive"},
    [CE_FLAG_SHOULDER] = {"shoulder", "the curve stays near half of its height over %.2g K: the "
                                      "half-step may lie anywhere there, prefer midpoint"},
    [CE_FLAG_SMALL_STEP] = {"small step", "the step is only %.2g times the noise"},
    [CE_FLAG_SHORT_WINDOW] = {"short window", "a baseline rests on %.2g K of curve only"},
    [CE_FLAG_CURVED_BASELINE] = {"curved baseline",
                                 "a baseline is curved by %.2g step heights over its window"},
    [CE_FLAG_TRANSIENT] =
        {"start-up", "the start-up transient reaches into the glassy window by %.2g step heights"},
    [CE_FLAG_PEAK_ADJACENT] = {"peak adjacent",
                               "another event begins %.3g K after the end of the step"},
    [CE_FLAG_CUT_OFF] = {"cut off",
                         "the run misses %.2g K of baseline: its end is too near the step"},
    [CE_FLAG_WIDE] = {"wide", "the transition is %.3g K wide: blend, filler or crystallinity?"},
    [CE_FLAG_SPARSE] = {"sparse", "only %.2g points lie within the step"},
    [CE_FLAG_FIRST_HEATING] = {"first heating",
                               "heating %.0f of its file: the thermal history is not erased"},
    [CE_FLAG_HEATINGS_DIFFER] = {"heatings differ",
                                 "the first heating differs by %+.2g K: solvent, plasticiser or "
                                 "history?"},
    [CE_FLAG_SIGN_GUESSED] = {"sign guessed",
                              "the sign of heat flow is not stated: taken from the step"},
    [CE_FLAG_STEP_IMPLAUSIBLE] =
        {"implausible step", "a step of %.3g J/(g K) is not that of an amorphous polymer: mass, "
                             "unit or sign?"},
    [CE_FLAG_ROUGH] = {"rough", "the step of one glass between two lines leaves %.2g step heights "
                                "unexplained, beyond the noise: blend, shoulder or another event?"},
    [CE_FLAG_NOT_MONOTONE] = {"not monotone", "the temperature steps back %.0f times within the "
                                              "segment: reading or control of it is disturbed"},
    [CE_FLAG_NO_OVERLAP] = {"no overlap", "the given windows do not enclose the step at %.1f K"},
};

const char *ce_flag_name(ce_flag_code code)
{
    return code < CE_FLAGS ? flags[code].name : "unknown";
}

void ce_flag_text(const ce_flag *flag, char *text, size_t room)
{
    if (flag->code >= CE_FLAGS) {
        (void)snprintf(text, room, "unknown flag");
        return;
    }
    char number[200];
#pragma GCC diagnostic push
#pragma GCC diagnostic ignored "-Wformat-nonliteral"
    (void)snprintf(number, sizeof number, flags[flag->code].sentence, flag->number);
#pragma GCC diagnostic pop
    (void)snprintf(text, room, "%s: %s", flags[flag->code].name, number);
}

ce_transition_options ce_transition_options_default(void)
{
    const ce_window none = {(double)NAN, (double)NAN};
    return (ce_transition_options){.glass = none, .liquid = none, .ensemble = true};
}
