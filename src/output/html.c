/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "output/html.h"

#include "output/text.h"

#include <nettle/base64.h>
#include <stdarg.h>
#include <stdlib.h>
#include <string.h>

static void put_escaped(FILE *to, const char *s)
{
    for (; *s != '\0'; s++) switch (*s) {
        case '&':
            fputs("&amp;", to);
            break;
        case '<':
            fputs("&lt;", to);
            break;
        case '>':
            fputs("&gt;", to);
            break;
        case '"':
            fputs("&quot;", to);
            break;
        case '\'':
            fputs("&#39;", to);
            break;
        default:
            (void)fputc(*s, to);
        }
}

void ce_html_text(FILE *to, const char *s, size_t columns)
{
    char *clean = ce_text_shown(s == NULL ? "" : s, columns);
    if (clean != NULL) put_escaped(to, clean);
    free(clean);
}

CE_PRINTF(2, 0)
static void put_formatted(FILE *to, const char *fmt, va_list ap)
{
    char *text = NULL;
    if (vasprintf(&text, fmt, ap) < 0) return;
    ce_html_text(to, text, 0);
    free(text);
}

void ce_html_printf(FILE *to, const char *fmt, ...)
{
    va_list ap;
    va_start(ap, fmt);
    put_formatted(to, fmt, ap);
    va_end(ap);
}

void ce_html_table_begin(FILE *to, const char *caption, const char *headings)
{
    fputs("<div class=\"scroll\"><table>\n<caption>", to);
    ce_html_text(to, caption, 0);
    fputs("</caption>\n<thead><tr>", to);
    for (const char *p = headings; *p != '\0';) {
        const size_t n = strcspn(p, "|"), name = strcspn(p, "~|");
        fprintf(to, "<th scope=\"col\">%.*s", (int)name, p);
        if (name < n) fprintf(to, " <span>%.*s</span>", (int)(n - name - 1), p + name + 1);
        fputs("</th>", to);
        p += n + (p[n] == '|');
    }
    fputs("</tr></thead>\n<tbody>\n", to);
}

void ce_html_row_begin(FILE *to, const char *heading)
{
    fputs("<tr><th scope=\"row\">", to);
    ce_html_text(to, heading, 80);
    fputs("</th>", to);
}

void ce_html_cell(FILE *to, const char *fmt, ...)
{
    va_list ap;
    fputs("<td>", to);
    va_start(ap, fmt);
    put_formatted(to, fmt, ap);
    va_end(ap);
    fputs("</td>", to);
}

void ce_html_row_end(FILE *to)
{
    fputs("</tr>\n", to);
}

void ce_html_table_end(FILE *to)
{
    fputs("</tbody></table></div>\n", to);
}

ce_status ce_html_picture(FILE *to, const char *svg, size_t n, const char *alt)
{
    char *text = malloc(BASE64_ENCODE_RAW_LENGTH(n) + 1);
    if (text == NULL) return CE_E_NOMEM;
    base64_encode_raw(text, n, (const unsigned char *)svg);
    text[BASE64_ENCODE_RAW_LENGTH(n)] = '\0';
    fputs("<img alt=\"", to);
    ce_html_text(to, alt, 0);
    fprintf(to, "\" src=\"data:image/svg+xml;base64,%s\">", text);
    free(text);
    return CE_OK;
}
