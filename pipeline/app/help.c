/* Overview, manual page and bash completion, all written from the command table and the option rows of argp,
 * so that they cannot fall behind the program. */
#include <ctype.h>
#include <string.h>

#include "app/command.h"

static int option_ends(const struct argp_option *o) { return !(o->name || o->key || o->doc || o->group); }
static int option_shown(const struct argp_option *o) { return o->name && !(o->flags & OPTION_HIDDEN); }

void help_overview(const command *commands, size_t n, textbuf *out) {
    text_add(out, "Usage: sward COMMAND [OPTION...] [FILE...]\n"
                  "Black-silicon micrographs to texture numbers, reflectance and a verdict.\n\n");
    for (size_t i = 0; i < n; i++) text_addf(out, "  %-10s %s\n", commands[i].name, commands[i].summary);
    text_add(out, "\n  sward COMMAND --help   what a command takes (also: sward help COMMAND)\n"
                  "  sward --version        the version\n\n"
                  "Exit status: 0 done; 1 internal or I/O failure; 2 wrong use or wrong protocol; 3 done, "
                  "but some inputs could\n"
                  "not be used; 4 done, and a target is missed (with --gate).\n");
}

/* Text in man(7): backslashes and hyphens escaped, no line may begin with a dot or an apostrophe. */
static void roff(textbuf *out, const char *s) {
    int line_start = out->n == 0 || out->s[out->n - 1] == '\n';
    for (; *s; s++) {
        if (line_start && (*s == '.' || *s == '\'')) text_add(out, "\\&");
        if (*s == '\\')
            text_add(out, "\\e");
        else if (*s == '-')
            text_add(out, "\\-");
        else
            text_add_n(out, s, 1);
        line_start = *s == '\n';
    }
}

/* argp's doc strings hold a part before the options and, behind a vertical tab, one after them. */
static void roff_paragraphs(textbuf *out, const char *doc) {
    const char *tab = strchr(doc, '\v');
    textbuf part = { 0 };
    text_add_n(&part, doc, tab ? (size_t)(tab - doc) : strlen(doc));
    if (part.n) {
        text_add(out, ".PP\n");
        roff(out, part.s);
        text_add(out, "\n");
    }
    text_free(&part);
    if (tab && tab[1]) {
        text_add(out, ".PP\n");
        roff(out, tab + 1);
        text_add(out, "\n");
    }
}

/* One heading for each form of use; argp parts them with line breaks. */
static void manual_heading(const char *name, const char *forms, textbuf *out) {
    do {
        size_t n = strcspn(forms, "\n");
        textbuf form = { 0 };
        text_addf(&form, "%.*s", (int)n, forms);
        text_addf(out, ".SS sward %s ", name);
        roff(out, form.s ? form.s : "");
        text_add(out, "\n");
        text_free(&form);
        forms += n + (forms[n] == '\n');
    } while (*forms);
}

static void manual_option(const struct argp_option *o, textbuf *out) {
    text_add(out, ".TP\n");
    if (o->key > ' ' && o->key < 127 && isprint(o->key)) text_addf(out, "\\fB\\-%c\\fR, ", o->key);
    text_add(out, "\\fB\\-\\-");
    roff(out, o->name);
    text_add(out, "\\fR");
    if (o->arg) {
        text_add(out, o->flags & OPTION_ARG_OPTIONAL ? "[=\\fI" : " \\fI");
        roff(out, o->arg);
        text_add(out, o->flags & OPTION_ARG_OPTIONAL ? "\\fR]" : "\\fR");
    }
    text_add(out, "\n");
    roff(out, o->doc ? o->doc : "");
    text_add(out, "\n");
}

void help_manual(const command *commands, size_t n, textbuf *out) {
    text_add(out,
             ".TH SWARD 1 \"\" \"sward " SWARD_VERSION "\" \"User Commands\"\n.SH NAME\n"
             "sward \\- texture numbers and reflectance from micrographs of black silicon\n.SH SYNOPSIS\n"
             ".B sward\n\\fICOMMAND\\fR [\\fIOPTION\\fR...] [\\fIFILE\\fR...]\n.SH DESCRIPTION\n"
             "Turns a folder of top\\-view micrographs of nanotextured silicon into spacing, density and "
             "sizes with their "
             "uncertainty, predicts the reflectance with a graded\\-index model, judges both against targets "
             "and keeps a "
             "history.\n.SH COMMANDS\n");
    for (size_t i = 0; i < n; i++) {
        const struct argp *a = commands[i].argp;
        manual_heading(commands[i].name, a->args_doc ? a->args_doc : "", out);
        roff_paragraphs(out, a->doc ? a->doc : commands[i].summary);
        for (const struct argp_option *o = a->options; o && !option_ends(o); o++)
            if (option_shown(o)) manual_option(o, out);
    }
    text_add(out, ".SH EXIT STATUS\n.TP\n0\ndone\n.TP\n1\ninternal or I/O failure\n.TP\n2\nwrong use or "
                  "wrong protocol\n.TP\n3\n"
                  "done, but some inputs could not be used\n.TP\n4\ndone, and a target is missed (with "
                  "\\fB\\-\\-gate\\fR)\n"
                  ".SH ENVIRONMENT\n.TP\nSWARD_MATERIALS\nfolder with the optical materials, instead of the "
                  "one beside the program\n");
}

void help_completion(const command *commands, size_t n, textbuf *out) {
    text_add(out,
             "# bash completion for sward\n_sward() {\n    local word=${COMP_WORDS[COMP_CWORD]} options=\n"
             "    if [ \"$COMP_CWORD\" -eq 1 ]; then\n        COMPREPLY=($(compgen -W \"");
    for (size_t i = 0; i < n; i++) text_addf(out, "%s ", commands[i].name);
    text_add(
        out,
        "help --help --version\" -- \"$word\"))\n        return\n    fi\n    case ${COMP_WORDS[1]} in\n");
    for (size_t i = 0; i < n; i++) {
        text_addf(out, "    %s) options=\"", commands[i].name);
        for (const struct argp_option *o = commands[i].argp->options; o && !option_ends(o); o++)
            if (option_shown(o)) text_addf(out, "--%s ", o->name);
        text_add(out, "--help\" ;;\n");
    }
    text_add(out, "    help) options=\"");
    for (size_t i = 0; i < n; i++) text_addf(out, "%s%s", i ? " " : "", commands[i].name);
    text_add(
        out,
        "\" ;;\n    esac\n    case ${COMP_WORDS[1]} in\n    protocol) options=\"$options print check "
        "explain\" ;;\n    esac\n"
        "    COMPREPLY=($(compgen -W \"$options\" -- \"$word\"))\n}\ncomplete -o default -F _sward sward\n");
}
