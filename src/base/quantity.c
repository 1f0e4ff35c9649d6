/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "base/quantity.h"

#include <string.h>
#include <strings.h>

/* Spellings are compared after fold(): no blanks, no brackets around the whole, micro and degree
 * signs in one form, "·", "*" and "⋅" dropped, "^-1" and "⁻¹" as "-1". Case counts unless the entry
 * says it does not: "MW" must never pass as "mW". */
typedef struct {
    const char *spelling;
    bool any_case;
    ce_unit unit;
} entry;

#define T(s, any, name, factor, offset)                                                            \
    {                                                                                              \
        s, any,                                                                                    \
        {                                                                                          \
            name, CE_DIM_TEMPERATURE, factor, offset                                               \
        }                                                                                          \
    }
#define U(s, any, name, dim, factor)                                                               \
    {                                                                                              \
        s, any,                                                                                    \
        {                                                                                          \
            name, dim, factor, 0.0                                                                 \
        }                                                                                          \
    }

/* clang-format off */
static const entry entries[] = {
    U("s", true, "s", CE_DIM_TIME, 1.0),
    U("sec", true, "s", CE_DIM_TIME, 1.0),
    U("secs", true, "s", CE_DIM_TIME, 1.0),
    U("second", true, "s", CE_DIM_TIME, 1.0),
    U("seconds", true, "s", CE_DIM_TIME, 1.0),
    U("sekunden", true, "s", CE_DIM_TIME, 1.0),
    U("sec.", true, "s", CE_DIM_TIME, 1.0),
    U("sek", true, "s", CE_DIM_TIME, 1.0),
    U("sek.", true, "s", CE_DIM_TIME, 1.0),
    U("secondes", true, "s", CE_DIM_TIME, 1.0),
    U("segundos", true, "s", CE_DIM_TIME, 1.0),
    U("ms", true, "ms", CE_DIM_TIME, 1.0e-3),
    U("min", true, "min", CE_DIM_TIME, 60.0),
    U("mins", true, "min", CE_DIM_TIME, 60.0),
    U("min.", true, "min", CE_DIM_TIME, 60.0),
    U("minute", true, "min", CE_DIM_TIME, 60.0),
    U("minutes", true, "min", CE_DIM_TIME, 60.0),
    U("minuten", true, "min", CE_DIM_TIME, 60.0),
    U("minutos", true, "min", CE_DIM_TIME, 60.0),
    U("h", true, "h", CE_DIM_TIME, 3600.0),
    U("hr", true, "h", CE_DIM_TIME, 3600.0),
    U("hour", true, "h", CE_DIM_TIME, 3600.0),
    U("hours", true, "h", CE_DIM_TIME, 3600.0),
    U("stunden", true, "h", CE_DIM_TIME, 3600.0),
    U("heures", true, "h", CE_DIM_TIME, 3600.0),
    U("horas", true, "h", CE_DIM_TIME, 3600.0),

    T("degC", true, "°C", 1.0, CE_ZERO_CELSIUS_K),
    T("C", true, "°C", 1.0, CE_ZERO_CELSIUS_K),
    T("degreeC", true, "°C", 1.0, CE_ZERO_CELSIUS_K),
    T("degreesC", true, "°C", 1.0, CE_ZERO_CELSIUS_K),
    T("celsius", true, "°C", 1.0, CE_ZERO_CELSIUS_K),
    T("oC", false, "°C", 1.0, CE_ZERO_CELSIUS_K),
    T("deg.C", true, "°C", 1.0, CE_ZERO_CELSIUS_K),
    T("gradC", true, "°C", 1.0, CE_ZERO_CELSIUS_K),
    T("gradcelsius", true, "°C", 1.0, CE_ZERO_CELSIUS_K),
    T("degcelsius", true, "°C", 1.0, CE_ZERO_CELSIUS_K),
    T("K", true, "K", 1.0, 0.0),
    T("degK", true, "K", 1.0, 0.0),
    T("kelvin", true, "K", 1.0, 0.0),
    T("degF", true, "°F", 5.0 / 9.0, 0.0),
    T("F", true, "°F", 5.0 / 9.0, 0.0),
    T("fahrenheit", true, "°F", 5.0 / 9.0, 0.0),
    T("degfahrenheit", true, "°F", 5.0 / 9.0, 0.0),

    U("K/min", true, "K/min", CE_DIM_RATE, 1.0),
    U("Kmin-1", true, "K/min", CE_DIM_RATE, 1.0),
    U("degC/min", true, "K/min", CE_DIM_RATE, 1.0),
    U("C/min", true, "K/min", CE_DIM_RATE, 1.0),
    U("degCmin-1", true, "K/min", CE_DIM_RATE, 1.0),
    U("K/s", true, "K/s", CE_DIM_RATE, 60.0),
    U("Ks-1", true, "K/s", CE_DIM_RATE, 60.0),
    U("degC/s", true, "K/s", CE_DIM_RATE, 60.0),
    U("K/h", true, "K/h", CE_DIM_RATE, 1.0 / 60.0),
    U("degF/min", true, "°F/min", CE_DIM_RATE, 5.0 / 9.0),

    U("uW", false, "µW", CE_DIM_POWER, 1.0e-3),
    U("uw", false, "µW", CE_DIM_POWER, 1.0e-3),
    U("mW", false, "mW", CE_DIM_POWER, 1.0),
    U("mw", false, "mW", CE_DIM_POWER, 1.0),
    U("milliwatt", true, "mW", CE_DIM_POWER, 1.0),
    U("milliwatts", true, "mW", CE_DIM_POWER, 1.0),
    U("mWatt", false, "mW", CE_DIM_POWER, 1.0),
    U("mJ/s", false, "mW", CE_DIM_POWER, 1.0),
    U("mJs-1", false, "mW", CE_DIM_POWER, 1.0),
    U("W", false, "W", CE_DIM_POWER, 1.0e3),
    U("w", false, "W", CE_DIM_POWER, 1.0e3),
    U("watt", true, "W", CE_DIM_POWER, 1.0e3),
    U("watts", true, "W", CE_DIM_POWER, 1.0e3),
    U("J/s", false, "W", CE_DIM_POWER, 1.0e3),

    U("W/g", true, "W/g", CE_DIM_SPECIFIC_POWER, 1.0),
    U("Wg-1", true, "W/g", CE_DIM_SPECIFIC_POWER, 1.0),
    U("watt/g", true, "W/g", CE_DIM_SPECIFIC_POWER, 1.0),
    U("watts/g", true, "W/g", CE_DIM_SPECIFIC_POWER, 1.0),
    U("watt/gram", true, "W/g", CE_DIM_SPECIFIC_POWER, 1.0),
    U("watts/gram", true, "W/g", CE_DIM_SPECIFIC_POWER, 1.0),
    U("W/gram", true, "W/g", CE_DIM_SPECIFIC_POWER, 1.0),
    U("mW/mg", false, "mW/mg", CE_DIM_SPECIFIC_POWER, 1.0),
    U("mw/mg", false, "mW/mg", CE_DIM_SPECIFIC_POWER, 1.0),
    U("mWmg-1", false, "mW/mg", CE_DIM_SPECIFIC_POWER, 1.0),
    U("uW/mg", false, "µW/mg", CE_DIM_SPECIFIC_POWER, 1.0e-3),
    U("mW/g", false, "mW/g", CE_DIM_SPECIFIC_POWER, 1.0e-3),
    U("mWg-1", false, "mW/g", CE_DIM_SPECIFIC_POWER, 1.0e-3),
    U("W/kg", false, "W/kg", CE_DIM_SPECIFIC_POWER, 1.0e-3),
    U("W/mg", false, "W/mg", CE_DIM_SPECIFIC_POWER, 1.0e3),
    U("J/(gs)", true, "W/g", CE_DIM_SPECIFIC_POWER, 1.0),
    U("J/(sg)", true, "W/g", CE_DIM_SPECIFIC_POWER, 1.0),
    U("J/s/g", true, "W/g", CE_DIM_SPECIFIC_POWER, 1.0),
    U("Jg-1s-1", true, "W/g", CE_DIM_SPECIFIC_POWER, 1.0),
    U("mJ/(smg)", false, "mJ/(s mg)", CE_DIM_SPECIFIC_POWER, 1.0),
    U("mJ/(mgs)", false, "mJ/(s mg)", CE_DIM_SPECIFIC_POWER, 1.0),
    U("mJs-1mg-1", false, "mJ/(s mg)", CE_DIM_SPECIFIC_POWER, 1.0),
    U("mJ/s/mg", false, "mJ/(s mg)", CE_DIM_SPECIFIC_POWER, 1.0),

    U("J/(gK)", true, "J/(g K)", CE_DIM_HEAT_CAPACITY, 1.0),
    U("J/gK", true, "J/(g K)", CE_DIM_HEAT_CAPACITY, 1.0),
    U("J/g/K", true, "J/(g K)", CE_DIM_HEAT_CAPACITY, 1.0),
    U("J/(g.K)", true, "J/(g K)", CE_DIM_HEAT_CAPACITY, 1.0),
    U("J/(degCg)", true, "J/(g K)", CE_DIM_HEAT_CAPACITY, 1.0),
    U("J/(Kg)", false, "J/(g K)", CE_DIM_HEAT_CAPACITY, 1.0),
    U("Jg-1K-1", true, "J/(g K)", CE_DIM_HEAT_CAPACITY, 1.0),
    U("JK-1g-1", true, "J/(g K)", CE_DIM_HEAT_CAPACITY, 1.0),
    U("J/(gdegC)", true, "J/(g K)", CE_DIM_HEAT_CAPACITY, 1.0),
    U("J/gdegC", true, "J/(g K)", CE_DIM_HEAT_CAPACITY, 1.0),
    U("mJ/(mgK)", false, "J/(g K)", CE_DIM_HEAT_CAPACITY, 1.0),
    U("kJ/(kgK)", false, "kJ/(kg K)", CE_DIM_HEAT_CAPACITY, 1.0),
    U("kJ/kgK", false, "kJ/(kg K)", CE_DIM_HEAT_CAPACITY, 1.0),
    U("kJ/kg/K", false, "kJ/(kg K)", CE_DIM_HEAT_CAPACITY, 1.0),
    U("J/(kgK)", false, "J/(kg K)", CE_DIM_HEAT_CAPACITY, 1.0e-3),
    U("mJ/(gK)", false, "mJ/(g K)", CE_DIM_HEAT_CAPACITY, 1.0e-3),

    U("g", false, "g", CE_DIM_MASS, 1.0),
    U("mg", false, "mg", CE_DIM_MASS, 1.0e-3),
    U("ug", false, "µg", CE_DIM_MASS, 1.0e-6),
    U("kg", false, "kg", CE_DIM_MASS, 1.0e3),

    U("g/mol", true, "g/mol", CE_DIM_MOLAR_MASS, 1.0),
    U("gmol-1", true, "g/mol", CE_DIM_MOLAR_MASS, 1.0),
    U("Da", true, "g/mol", CE_DIM_MOLAR_MASS, 1.0),
    U("kg/mol", true, "kg/mol", CE_DIM_MOLAR_MASS, 1.0e3),
    U("kgmol-1", true, "kg/mol", CE_DIM_MOLAR_MASS, 1.0e3),
    U("kDa", true, "kg/mol", CE_DIM_MOLAR_MASS, 1.0e3),

    U("%", true, "%", CE_DIM_FRACTION, 1.0e-2),
    U("1", true, "1", CE_DIM_FRACTION, 1.0),
};
/* clang-format on */

/* Sequences rewritten while folding; the longer form of a pair comes first. */
static const struct {
    const char *from, *to;
} rewrites[] = {
    {"\xC2\xB0", "deg"}, /* degree sign                  */
    {"\xC2\xBA", "deg"}, /* masculine ordinal, mistaken  */
    {"\xCB\x9A", "deg"}, /* ring above, mistaken         */
    {"\xE2\x84\x83", "degC"} /* one-character degree Celsius */,
    {"\xE2\x84\x89", "degF"},
    {"\xE2\x84\xAA", "K"}, /* Kelvin sign                    */
    {"\xC2\xB5", "u"},     /* micro sign                     */
    {"\xCE\xBC", "u"},     /* Greek mu                       */
    {"\xC2\xB7", ""},      /* middle dot                     */
    {"\xE2\x8B\x85", ""},  /* dot operator                   */
    {"\xE2\x88\x99", ""},  /* bullet operator                */
    {"*", ""},
    {"^", ""},
    {"\xE2\x81\xBB\xC2\xB9", "-1"}, /* superscript minus one */
    {"\xE2\x88\x92", "-"},          /* minus sign            */
    {"\xC2\xA0", ""},               /* no-break space        */
    {"\xE2\x80\xAF", ""},           /* narrow no-break space */
    {" ", ""},
    {"\t", ""},
    {"_", ""},
};

static size_t fold(const char *text, size_t len, char *out, size_t room)
{
    size_t n = 0;
    for (size_t i = 0; i < len;) {
        const char *to = NULL;
        size_t step = 1;
        for (size_t r = 0; r < sizeof rewrites / sizeof *rewrites && to == NULL; r++) {
            size_t k = strlen(rewrites[r].from);
            if (k <= len - i && memcmp(text + i, rewrites[r].from, k) == 0) {
                to = rewrites[r].to;
                step = k;
            }
        }
        size_t m = to == NULL ? 1 : strlen(to);
        if (n + m >= room) return 0;
        memcpy(out + n, to == NULL ? text + i : to, m);
        n += m;
        i += step;
    }
    out[n] = '\0';
    return n;
}

/* Brackets around the whole unit are the header's, not the unit's. */
static char *unwrap(char *s, size_t n)
{
    if (n >= 2 && ((s[0] == '[' && s[n - 1] == ']') || (s[0] == '(' && s[n - 1] == ')') ||
                   (s[0] == '{' && s[n - 1] == '}'))) {
        s[n - 1] = '\0';
        return s + 1;
    }
    return s;
}

const ce_unit *ce_unit_find(const char *text, size_t len)
{
    char buf[48];
    size_t n = fold(text, len, buf, sizeof buf);
    if (n == 0) return NULL;
    const char *s = unwrap(buf, n);
    for (size_t i = 0; i < sizeof entries / sizeof *entries; i++) {
        const entry *e = &entries[i];
        if (e->any_case ? strcasecmp(s, e->spelling) == 0 : strcmp(s, e->spelling) == 0)
            return &e->unit;
    }
    return NULL;
}

/* Degrees Fahrenheit: (F - 32) * 5/9 + 273.15, by its definition from the Celsius scale; the other
 * temperature units carry their offset in kelvin. */
static bool is_fahrenheit(const ce_unit *unit)
{
    return unit->dimension == CE_DIM_TEMPERATURE && unit->factor != 1.0;
}

double ce_to_internal(const ce_unit *unit, double value)
{
    if (is_fahrenheit(unit)) return ce_K_from_degC((value - 32.0) * 5.0 / 9.0);
    if (unit->dimension == CE_DIM_TEMPERATURE) return value + unit->offset;
    return value * unit->factor;
}

double ce_from_internal(const ce_unit *unit, double value)
{
    if (is_fahrenheit(unit)) return ce_degC_from_K(value) * 9.0 / 5.0 + 32.0;
    if (unit->dimension == CE_DIM_TEMPERATURE) return value - unit->offset;
    return value / unit->factor;
}

const char *ce_dimension_name(ce_dimension dimension)
{
    switch (dimension) {
    case CE_DIM_NONE:
        return "no dimension";
    case CE_DIM_TIME:
        return "time";
    case CE_DIM_TEMPERATURE:
        return "temperature";
    case CE_DIM_RATE:
        return "rate";
    case CE_DIM_POWER:
        return "heat flow";
    case CE_DIM_SPECIFIC_POWER:
        return "heat flow per mass";
    case CE_DIM_HEAT_CAPACITY:
        return "specific heat capacity";
    case CE_DIM_MASS:
        return "mass";
    case CE_DIM_MOLAR_MASS:
        return "molar mass";
    case CE_DIM_FRACTION:
        return "fraction";
    }
    return "unknown";
}
