/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "run/words.h"

#include <ctype.h>
#include <string.h>

#define COUNT(a) (sizeof(a) / sizeof *(a))

/* Latin letters with accents as they stand in UTF-8, and what they fold to. */
static const struct {
    const char *from, *to;
} accents[] = {
    {"ä", "a"}, {"ö", "o"}, {"ü", "u"}, {"Ä", "a"}, {"Ö", "o"},  {"Ü", "u"},   {"ß", "ss"},
    {"é", "e"}, {"è", "e"}, {"ê", "e"}, {"É", "e"}, {"È", "e"},  {"à", "a"},   {"á", "a"},
    {"â", "a"}, {"Á", "a"}, {"í", "i"}, {"î", "i"}, {"ó", "o"},  {"ô", "o"},   {"Ó", "o"},
    {"ú", "u"}, {"û", "u"}, {"ñ", "n"}, {"ç", "c"}, {"œ", "oe"}, {"Φ", "phi"}, {"φ", "phi"},
};

size_t ce_fold_word(const char *text, char *out, size_t room)
{
    size_t n = 0;
    for (const char *p = text; *p != '\0';) {
        const char *to = NULL;
        size_t step = 1;
        for (size_t i = 0; i < COUNT(accents) && to == NULL; i++) {
            size_t k = strlen(accents[i].from);
            if (strncmp(p, accents[i].from, k) == 0) {
                to = accents[i].to;
                step = k;
            }
        }
        char one[2] = {(char)tolower((unsigned char)*p), '\0'};
        if (to == NULL) to = (unsigned char)*p < 0x80 && isalnum((unsigned char)*p) ? one : "";
        for (; *to != '\0' && n + 1 < room; to++) out[n++] = *to;
        p += step;
    }
    out[n] = '\0';
    return n;
}

static bool is_one_of(const char *word, const char *const *list, size_t n)
{
    for (size_t i = 0; i < n; i++)
        if (strcmp(word, list[i]) == 0) return true;
    return false;
}

static bool has_one_of(const char *word, const char *const *list, size_t n)
{
    for (size_t i = 0; i < n; i++)
        if (strstr(word, list[i]) != NULL) return true;
    return false;
}

#define IS(word, list)  is_one_of(word, list, COUNT(list))
#define HAS(word, list) has_one_of(word, list, COUNT(list))

static const char *const of_no_use[] = {
    "deriv",         "ableitung",   "integral", "baseline",   "grundlinie", "basislinie",
    "unsubtracted",  "sensit",      "massloss", "weightloss", "massloss",   "masseverlust",
    "massenverlust", "purge",       "pressure", "voltage",    "gasflow",    "conversion",
    "gasfluss",      "lignedebase", "lineabase"};
static const char *const of_no_use_whole[] = {
    "tg",   "dtg",  "mass",  "masse", "masa", "weight", "index",  "no",
    "nr",   "n",    "point", "punkt", "row",  "id",     "number", "nummer",
    "date", "note", "gain",  "flag",  "ms",   "qms",    "ddsc"};
static const char *const flow_words[] = {
    "heatflow",        "heatflux",        "heatrate",       "flowofheat",   "warmestrom",
    "waermestrom",     "warmefluss",      "waermefluss",    "warmeflu",     "fluxdechaleur",
    "fluxthermique",   "fluxcalorifique", "flujodecalor",   "flujotermico", "flujocalorifico",
    "puissancethermi", "flussotermico",   "flussodicalore", "dsc"};
static const char *const flow_whole[] = {"hf",
                                         "phi",
                                         "q",
                                         "dhdt",
                                         "dqdt",
                                         "power",
                                         "leistung",
                                         "puissance",
                                         "potencia",
                                         "p",
                                         "signal",
                                         "thermalpower",
                                         "hflow",
                                         "heatfl",
                                         "warmeleistung",
                                         "waermeleistung",
                                         "fluxo",
                                         "flux",
                                         "flujo",
                                         "heat"};
static const char *const capacity_words[] = {
    "heatcapacity",    "specificheat",     "warmekapaz",        "waermekapaz",
    "capacitethermi",  "capacitecalorifi", "chaleurspecifique", "chaleurmassique",
    "capacidadcalori", "capacidadtermica", "calorespecifico",   "capaciteterm"};
static const char *const capacity_whole[] = {"cp", "revcp", "totalcp", "cpapp", "apparentcp"};
static const char *const programme_words[] = {"program", "setpoint", "soll", "consigne", "refer",
                                              "furnace", "oven",     "ofen", "block",    "four",
                                              "horno",   "jacket",   "cell", "zelle",    "set"};
static const char *const programme_whole[] = {"tr", "tp", "tref", "tprog", "tset", "tfurnace"};
static const char *const temperature_words[] = {"temperat", "tempreature", "temprature",
                                                "temperture"};
static const char *const temperature_whole[] = {
    "temp",       "ts", "tsample", "tprobe", "samplet", "sampletemp", "tempsample",
    "probentemp", "tk", "tc",      "tempc",  "tempk",   "tcorr"};
static const char *const time_words[] = {"time",       "zeit",     "tiempo", "duree",
                                         "tempsecoul", "duracion", "elapsed"};
static const char *const time_whole[] = {"temps", "tempo", "tmin", "tsec", "seconds", "minutes"};
static const char *const segment_whole[] = {
    "segment",  "seg",  "segmentnumber", "segmentno", "segmentnr", "segno", "abschnitt",
    "schritt",  "step", "stepno",        "cycle",     "zyklus",    "etape", "etapa",
    "segmento", "paso", "ciclo",         "stage",     "rampe",     "ramp",  "segmentnummer"};

static ce_meaning by_name(const char *name)
{
    char w[200];
    if (strcmp(name, "t") == 0) return CE_MEANS_TIME;
    if (strcmp(name, "T") == 0) return CE_MEANS_TEMPERATURE;
    if (ce_fold_word(name, w, sizeof w) == 0) return CE_MEANS_UNKNOWN;
    if (HAS(w, of_no_use) || IS(w, of_no_use_whole)) return CE_MEANS_OTHER;
    if (IS(w, segment_whole)) return CE_MEANS_SEGMENT;
    if (HAS(w, flow_words) || IS(w, flow_whole)) return CE_MEANS_HEAT_FLOW;
    if (HAS(w, capacity_words) || IS(w, capacity_whole)) return CE_MEANS_HEAT_CAPACITY;
    if (IS(w, programme_whole)) return CE_MEANS_PROGRAMME;
    if (HAS(w, temperature_words) || IS(w, temperature_whole))
        return HAS(w, programme_words) ? CE_MEANS_PROGRAMME : CE_MEANS_TEMPERATURE;
    if (HAS(w, time_words) || IS(w, time_whole)) return CE_MEANS_TIME;
    /* "Temp 1", "Heat 2", "Temp. sample": a known word with something behind it. */
    if (strncmp(w, "temp", 4) == 0)
        return HAS(w, programme_words) ? CE_MEANS_PROGRAMME : CE_MEANS_TEMPERATURE;
    if (strncmp(w, "hf", 2) == 0 && (w[2] == '\0' || isdigit((unsigned char)w[2])))
        return CE_MEANS_HEAT_FLOW;
    if (strncmp(w, "cp", 2) == 0 && (w[2] == '\0' || isdigit((unsigned char)w[2])))
        return CE_MEANS_HEAT_CAPACITY;
    return CE_MEANS_UNKNOWN;
}

bool ce_meaning_fits(ce_meaning role, const ce_unit *unit)
{
    if (unit == NULL) return true;
    switch (role) {
    case CE_MEANS_TIME:
        return unit->dimension == CE_DIM_TIME;
    case CE_MEANS_TEMPERATURE:
    case CE_MEANS_PROGRAMME:
        return unit->dimension == CE_DIM_TEMPERATURE;
    case CE_MEANS_HEAT_FLOW:
        return unit->dimension == CE_DIM_POWER || unit->dimension == CE_DIM_SPECIFIC_POWER;
    case CE_MEANS_HEAT_CAPACITY:
        return unit->dimension == CE_DIM_HEAT_CAPACITY;
    default:
        return true;
    }
}

static ce_meaning by_unit(const ce_unit *unit)
{
    switch (unit->dimension) {
    case CE_DIM_TIME:
        return CE_MEANS_TIME;
    case CE_DIM_TEMPERATURE:
        return CE_MEANS_TEMPERATURE;
    case CE_DIM_POWER:
    case CE_DIM_SPECIFIC_POWER:
        return CE_MEANS_HEAT_FLOW;
    case CE_DIM_HEAT_CAPACITY:
        return CE_MEANS_HEAT_CAPACITY;
    default:
        return CE_MEANS_OTHER;
    }
}

/* Words that are used for two things: their unit says for which. */
static bool open_word(const char *name)
{
    static const char *const open[] = {"t", "temps", "temp", "tempo", "signal", "q", "p"};
    char w[200];
    (void)ce_fold_word(name, w, sizeof w);
    return IS(w, open);
}

ce_meaning ce_meaning_of(const char *name, const ce_unit *unit)
{
    ce_meaning role = by_name(name);
    if (unit == NULL || role == CE_MEANS_OTHER || role == CE_MEANS_SEGMENT) return role;
    if (role == CE_MEANS_UNKNOWN || open_word(name)) return by_unit(unit);
    if (ce_meaning_fits(role, unit)) return role;
    /* A DSC signal may have been turned into a heat capacity and kept its name, and back. */
    ce_meaning other = by_unit(unit);
    bool signals = (role == CE_MEANS_HEAT_FLOW || role == CE_MEANS_HEAT_CAPACITY) &&
                   (other == CE_MEANS_HEAT_FLOW || other == CE_MEANS_HEAT_CAPACITY);
    return signals ? other : CE_MEANS_UNKNOWN;
}

const char *ce_meaning_name(ce_meaning role)
{
    switch (role) {
    case CE_MEANS_TIME:
        return "time";
    case CE_MEANS_TEMPERATURE:
        return "temperature";
    case CE_MEANS_PROGRAMME:
        return "programme temperature";
    case CE_MEANS_HEAT_FLOW:
        return "heat flow";
    case CE_MEANS_HEAT_CAPACITY:
        return "heat capacity";
    case CE_MEANS_SEGMENT:
        return "segment";
    case CE_MEANS_OTHER:
        return "not used";
    case CE_MEANS_UNKNOWN:
        break;
    }
    return "unknown";
}

/* Where heat flow points. Longer spellings before those they begin with. */
static const struct {
    const char *word;
    int up;
} directions[] = {
    {"upwards", 1},  {"upward", 1},    {"up", 1},        {"downwards", -1}, {"downward", -1},
    {"down", -1},    {"oben", 1},      {"unten", -1},    {"haut", 1},       {"bas", -1},
    {"arriba", 1},   {"abajo", -1},    {"positive", 1},  {"positiv", 1},    {"positif", 1},
    {"positivo", 1}, {"positiva", 1},  {"negative", -1}, {"negativ", -1},   {"négatif", -1},
    {"negatif", -1}, {"negativo", -1}, {"negativa", -1}, {"↑", 1},          {"↓", -1},
    {"⇑", 1},        {"⇓", -1},        {"▲", 1},         {"▼", -1},         {"^", 1},
    {">0", 1},       {"<0", -1},       {"> 0", 1},       {"< 0", -1},       {"+", 1},
    {"->", 0},
};

static bool letter(char c)
{
    return isalpha((unsigned char)c) || (unsigned char)c >= 0x80;
}

/* A direction at p: its length, 0 when there is none. Words end where letters end. */
static size_t direction_at(const char *begin, const char *p, int *up)
{
    for (size_t i = 0; i < COUNT(directions); i++) {
        size_t k = strlen(directions[i].word);
        if (directions[i].up == 0 || strncmp(p, directions[i].word, k) != 0) continue;
        if (isalpha((unsigned char)directions[i].word[0]) &&
            (letter(p[k]) || (p > begin && isalpha((unsigned char)p[-1]) &&
                              strncmp(p - (p - begin > 2 ? 3 : 0), "exo", 3) != 0 &&
                              strncmp(p - (p - begin > 3 ? 4 : 0), "endo", 4) != 0)))
            continue;
        *up = directions[i].up;
        return k;
    }
    return 0;
}

/* How far behind "exo" its direction may stand: "exothermic events point upwards". */
#define REACH 28

/* Find "exo ... up" from p on: [*from, *to) and its direction; false when there is none. */
static bool find_sign(const char *low, const char *p, const char **from, const char **to, int *exo)
{
    for (; *p != '\0'; p++) {
        size_t stem = strncmp(p, "exo", 3) == 0 ? 3 : strncmp(p, "endo", 4) == 0 ? 4 : 0;
        if (stem == 0 || (p > low && letter(p[-1]) && (unsigned char)p[-1] < 0x80)) continue;
        int up = 0;
        size_t k = 0;
        const char *q = p + stem;
        for (; *q != '\0' && q - p < REACH && k == 0; q++) {
            k = direction_at(low, q, &up);
            if (k == 0 && q > p + stem && (strncmp(q, "exo", 3) == 0 || strncmp(q, "endo", 4) == 0))
                break;
        }
        *from = p;
        *to = q + (k == 0 ? 0 : k - 1);
        if (k == 0) {
            /* "↑ exo", "^exo". */
            const char *b = p;
            while (b > low && (b[-1] == ' ' || b[-1] == '_')) b--;
            if (b > low && b[-1] == '^') up = 1, *from = b - 1;
            if (b - low >= 3 && strncmp(b - 3, "↑", 3) == 0) up = 1, *from = b - 3;
            if (b - low >= 3 && strncmp(b - 3, "↓", 3) == 0) up = -1, *from = b - 3;
            if (up == 0) continue;
            *to = p + stem;
            while (letter(**to)) ++*to;
        }
        *exo = stem == 3 ? up : -up;
        return true;
    }
    return false;
}

/* Drop "()", "[]", "( , )" and marks left hanging at the end. */
static void drop_empty(char *s)
{
    for (char *p = s; *p != '\0';) {
        char *q = p + 1;
        while (*q == ' ' || *q == ',' || *q == ';') q++;
        if ((*p == '(' && *q == ')') || (*p == '[' && *q == ']'))
            memmove(p, q + 1, strlen(q + 1) + 1);
        else
            p++;
    }
    size_t n = strlen(s);
    while (n > 0 && strchr(" ,;-_", s[n - 1]) != NULL) s[--n] = '\0';
}

ce_sign ce_sign_of(const char *text, char *clean, size_t room)
{
    char low[256], left[256];
    size_t n = strlen(text);
    if (n >= sizeof low) n = sizeof low - 1;
    for (size_t i = 0; i < n; i++)
        low[i] = (unsigned char)text[i] < 0x80 ? (char)tolower((unsigned char)text[i]) : text[i];
    low[n] = '\0';
    memcpy(left, text, n);
    left[n] = '\0';
    int found = 0, exo = 0;
    bool clash = false;
    const char *from, *to;
    for (const char *p = low; find_sign(low, p, &from, &to, &exo); p = to) {
        clash = clash || (found != 0 && found != exo);
        found = exo;
        /* One piece is cut out at a time; what was cut before has become blanks. */
        memset(left + (from - low), ' ', (size_t)(to - from));
    }
    if (clean != NULL && room > 0) {
        drop_empty(left);
        size_t k = strlen(left) < room ? strlen(left) : room - 1;
        memcpy(clean, left, k);
        clean[k] = '\0';
    }
    if (found == 0 || clash) return CE_SIGN_AUTO;
    return found > 0 ? CE_SIGN_EXO_UP : CE_SIGN_ENDO_UP;
}

ce_key ce_key_of(const char *key)
{
    static const char *const mass[] = {"mass",
                                       "samplemass",
                                       "massofsample",
                                       "weight",
                                       "sampleweight",
                                       "samplesize",
                                       "size",
                                       "masse",
                                       "probenmasse",
                                       "einwaage",
                                       "probeneinwaage",
                                       "masa",
                                       "masademuestra",
                                       "masadelamuestra",
                                       "initialmass",
                                       "massedelechantillon",
                                       "massedechantillon",
                                       "masseechantillon",
                                       "gewicht",
                                       "probengewicht",
                                       "peso",
                                       "pesomuestra",
                                       "pesodelamuestra",
                                       "masamuestra",
                                       "massesample",
                                       "prisedessai"};
    static const char *const rate[] = {"rate",
                                       "heatingrate",
                                       "scanrate",
                                       "ramprate",
                                       "heizrate",
                                       "aufheizrate",
                                       "vitesse",
                                       "vitessedechauffe",
                                       "vitessedechauffage",
                                       "velocidad",
                                       "ramp",
                                       "velocidaddecalentamiento",
                                       "tasadecalentamiento",
                                       "heatrate",
                                       "rampe",
                                       "rampa"};
    static const char *const sample[] = {
        "sample",     "samplename",        "sampleid",    "probe",
        "probenname", "probenbezeichnung", "echantillon", "nomdelechantillon",
        "muestra",    "nombredelamuestra", "name",        "nom",
        "nombre",     "specimen"};
    static const char *const direction[] = {"direction",  "sign",  "heatflowdirection",
                                            "vorzeichen", "signe", "signo",
                                            "richtung",   "exo",   "endo"};
    char w[128];
    (void)ce_fold_word(key, w, sizeof w);
    if (IS(w, mass)) return CE_KEY_MASS;
    if (IS(w, rate)) return CE_KEY_RATE;
    if (IS(w, sample)) return CE_KEY_SAMPLE;
    if (IS(w, direction)) return CE_KEY_DIRECTION;
    return CE_KEY_OTHER;
}

int ce_direction_of(const char *text)
{
    static const char *const heating[] = {"heating", "aufheiz", "heizen", "heizung",
                                          "chauff",  "calent",  "heatup"};
    static const char *const cooling[] = {"cooling", "abkuhl",   "abkuehl", "kuhlen", "kuehlen",
                                          "kuhlung", "kuehlung", "refroid", "enfri",  "cooldown"};
    char w[200];
    (void)ce_fold_word(text, w, sizeof w);
    bool h = HAS(w, heating), c = HAS(w, cooling);
    return h == c ? 0 : h ? 1 : -1;
}
