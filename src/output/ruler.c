/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "output/ruler.h"

#include "output/number.h"
#include "output/text.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

enum { WIDTH = 70, NAME = 16 };

/* Marks of one line; each is one column wide. */
typedef enum {
    BLANK,
    GRID,
    BAR,
    LEFT,
    RIGHT,
    OPEN_LEFT,
    OPEN_RIGHT,
    POINT,
    STANDARD,
    CEILING
} mark;
static const char *const marks[][2] = {
    [BLANK] = {" ", " "},      [GRID] = {"·", "."},  [BAR] = {"─", "-"},
    [LEFT] = {"├", "|"},       [RIGHT] = {"┤", "|"}, [OPEN_LEFT] = {"◄", "<"},
    [OPEN_RIGHT] = {"►", ">"}, [POINT] = {"●", "O"}, [STANDARD] = {"┴", "+"},
    [CEILING] = {"▲", "^"}};

typedef struct {
    double low, high; /* ln Mn at both ends                                                     */
    bool ascii;
    mark line[WIDTH];
} ruler;

static int column_of(const ruler *r, double mn_g_mol)
{
    const double at = (log(mn_g_mol) - r->low) / (r->high - r->low) * (WIDTH - 1);
    return at < 0.0 ? -1 : at > WIDTH - 1 ? WIDTH : (int)lround(at);
}

static void set(ruler *r, int column, mark m)
{
    if (column >= 0 && column < WIDTH) r->line[column] = m;
}

/* 1, 2, 5, 10, ... g/mol: the i-th of them from 100 g/mol on. */
static double tick(int i)
{
    static const double step[] = {1.0, 2.0, 5.0};
    return step[i % 3] * pow(10.0, floor((double)i / 3.0) + 2.0);
}
enum { TICKS = 21 };

static void clear_line(ruler *r, bool grid)
{
    for (int i = 0; i < WIDTH; i++) r->line[i] = BLANK;
    for (int i = 0; grid && i < TICKS; i++) set(r, column_of(r, tick(i)), GRID);
}

static void put_line(const ruler *r, FILE *to, const char *name)
{
    int last = WIDTH;
    while (last > 0 && r->line[last - 1] == BLANK) last--;
    fprintf(to, "%s%*s", name, NAME - (int)ce_text_columns(name), "");
    for (int i = 0; i < last; i++) fputs(marks[r->line[i]][r->ascii], to);
    fputc('\n', to);
}

static void put_scale(const ruler *r, FILE *to)
{
    char line[WIDTH + CE_NUMBER_ROOM];
    memset(line, ' ', sizeof line);
    int free_from = 0, end = 0;
    for (int i = 0; i < TICKS; i++) {
        char text[CE_NUMBER_ROOM];
        const int at = column_of(r, tick(i)),
                  n = (int)strlen(ce_significant(text, tick(i) / 1000.0, 1));
        if (at < free_from || at >= WIDTH) continue;
        memcpy(line + at, text, (size_t)n);
        free_from = at + n + 1;
        end = at + n;
    }
    fprintf(to, "%*s%.*s kg/mol\n", NAME, "", end, line);
}

/* What is shown of an answer runs from a to b, g/mol; open ends are 0 and infinite. */
static bool extent(const ce_answer *a, double *low, double *high)
{
    const ce_estimate *e = &a->mn;
    if (a->status != CE_OK || a->tg_of_mn || e->disjoint) return false;
    if (e->bound == CE_ABOVE_PLATEAU || (isnan(e->low_g_mol) && isnan(e->high_g_mol))) return false;
    *low = isnan(e->low_g_mol) ? 0.0 : e->low_g_mol;
    *high = isnan(e->high_g_mol) || (e->flags & CE_EST_HIGH_ABSURD) != 0 ? (double)INFINITY
                                                                         : e->high_g_mol;
    return true;
}

static void put_answer(ruler *r, FILE *to, const ce_answer *a, const char *name)
{
    double low, high;
    clear_line(r, true);
    if (extent(a, &low, &high)) {
        int from = low > 0.0 ? column_of(r, low) : -1,
            until = isfinite(high) ? column_of(r, high) : WIDTH;
        for (int i = from > 0 ? from : 0; i <= until && i < WIDTH; i++) set(r, i, BAR);
        set(r, from, LEFT);
        set(r, until, RIGHT);
        if (from < 0) set(r, 0, OPEN_LEFT);
        if (until >= WIDTH) set(r, WIDTH - 1, OPEN_RIGHT);
        if (a->mn.bound == CE_TWO_SIDED) set(r, column_of(r, a->mn.mn_g_mol), POINT);
    } else if (a->mn.bound == CE_ABOVE_PLATEAU)
        set(r, WIDTH - 1, OPEN_RIGHT);
    put_line(r, to, name);
}

/* From below the least to above the greatest of standards, limits and ceiling. */
static bool lay_out(const ce_estimate_result *result, ruler *r)
{
    double low = HUGE_VAL, high = 0.0;
    bool any = false;
    for (size_t i = 0; i < result->n; i++) {
        double a, b;
        any = any || (result->answer[i].status == CE_OK && !result->answer[i].tg_of_mn);
        if (!extent(&result->answer[i], &a, &b)) continue;
        if (a > 0.0) low = fmin(low, a);
        if (isfinite(b)) high = fmax(high, b);
        if (a > 0.0) high = fmax(high, a);
    }
    for (size_t i = 0; i < result->fit->n_points; i++) {
        low = fmin(low, result->fit->point[i].molar.mn_g_mol);
        high = fmax(high, result->fit->point[i].molar.mn_g_mol);
    }
    if (isfinite(result->ceiling_mn_g_mol)) high = fmax(high, result->ceiling_mn_g_mol);
    r->low = log(low / 1.25);
    r->high = log(high * 1.6);
    return any && low > 0.0 && isfinite(low) && high > low;
}

ce_status ce_write_ruler(const ce_estimate_result *result, FILE *to, bool ascii)
{
    ruler r = {.ascii = ascii};
    if (!lay_out(result, &r)) return CE_OK;
    fputc('\n', to);
    put_scale(&r, to);
    for (size_t i = 0; i < result->n; i++) {
        const ce_answer *a = &result->answer[i];
        if (a->status != CE_OK || a->tg_of_mn) continue;
        char *name = ce_text_shown(ce_answer_label(a), NAME - 2);
        if (name == NULL) return CE_E_NOMEM;
        put_answer(&r, to, a, name);
        free(name);
    }
    clear_line(&r, false);
    for (size_t i = 0; i < result->fit->n_points; i++)
        set(&r, column_of(&r, result->fit->point[i].molar.mn_g_mol), STANDARD);
    put_line(&r, to, "standards");
    if (isfinite(result->ceiling_mn_g_mol)) {
        clear_line(&r, false);
        set(&r, column_of(&r, result->ceiling_mn_g_mol), CEILING);
        put_line(&r, to, "ceiling, one run");
    }
    return CE_OK;
}
