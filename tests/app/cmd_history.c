/* `sward history` over a ledger of known rows: table, JSON with the stored digits, CSV, filters, no ledger.
 */
#include <cjson/cJSON.h>
#include <stdlib.h>
#include <unistd.h>

#include "app/command.h"
#include "base/limits.h"
#include "base/quantity.h"
#include "check.h"
#include "io/file.h"
#include "io/table.h"
#include "judge/history.h"

static char folder[200], ledger[300], output[300];

/* Runs the command with stdout in a file; its text (caller frees) and its exit code. */
static char *run(int *code, const char *a, const char *b, const char *c) {
    char name[] = "sward history", option[] = "--history";
    char first[120], second[120], third[120];
    char *argv[] = { name, option, ledger, first, second, third, NULL };
    int argc = 3;
    snprintf(first, sizeof first, "%s", a ? a : "");
    snprintf(second, sizeof second, "%s", b ? b : "");
    snprintf(third, sizeof third, "%s", c ? c : "");
    argc += (a != NULL) + (b != NULL) + (c != NULL);
    argv[argc] = NULL;
    fflush(stdout);
    int kept = dup(STDOUT_FILENO);
    FILE *f = fopen(output, "w");
    CHECK(kept >= 0 && f != NULL);
    if (!f) return NULL;
    dup2(fileno(f), STDOUT_FILENO);
    *code = cmd_history(argc, argv);
    fflush(stdout);
    dup2(kept, STDOUT_FILENO);
    close(kept);
    fclose(f);
    char *text = NULL;
    size_t n = 0;
    error e = { ST_OK, "" };
    CHECK(file_read(output, LIMIT_TEXT_FILE_BYTES, &text, &n, &e) == ST_OK);
    return text;
}

static void fill_ledger(void) {
    static const history_row rows[] = { { "S2", "L2", "4", "2026-03-15T08:00:00Z", "2026-04-01T10:00:00Z",
                                          "f2", "0.1.0", "line 3", 355.25, 8.1, 9.1, 340.5, 0.01831,
                                          "conforms",
                                          "{\"sample\": \"S2\", \"lot\": \"L2\", \"etched_at\": "
                                          "\"2026-03-15T08:00:00Z\", \"spacing_nm\": 355.25, "
                                          "\"weighted_reflectance\": 0.01831, \"note\": \"=1+1\"}", MISSING, "" },
                                        { "S1", "L1", "3", "2026-03-14T08:00:00Z", "2026-04-01T10:00:00Z",
                                          "f1", "0.1.0", "line 3", 351.2, 7.7, 9.3, 338.1, MISSING, "fails",
                                          "{\"sample\": \"S1\", \"lot\": \"L1\", \"etched_at\": "
                                          "\"2026-03-14T08:00:00Z\", \"spacing_nm\": 351.2, "
                                          "\"weighted_reflectance\": null, \"x_mm\": \"-3.5\"}", MISSING, "" } };
    history *h = NULL;
    size_t added = 0;
    error e = { ST_OK, "" };
    CHECK(history_open(ledger, 0, &h, &e) == ST_OK && history_add(h, rows, 2, &added, &e) == ST_OK &&
          added == 2);
    if (e.text[0]) printf("%s\n", e.text);
    history_close(h);
}

static void prints_json(void) {
    int code = -1;
    char *text = run(&code, "--json", NULL, NULL);
    cJSON *array = cJSON_Parse(text);
    CHECK(code == EXIT_DONE && cJSON_GetArraySize(array) == 2);
    const cJSON *first = cJSON_GetArrayItem(array, 0), *second = cJSON_GetArrayItem(array, 1);
    const cJSON *sample = cJSON_GetObjectItem(first, "sample"),
                *run_at = cJSON_GetObjectItem(second, "run_at");
    CHECK(cJSON_IsString(sample) && strcmp(sample->valuestring, "S1") == 0); /* in order of the etches */
    CHECK(cJSON_IsString(run_at) && strcmp(run_at->valuestring, "2026-04-01T10:00:00Z") == 0);
    CHECK(cJSON_IsNull(cJSON_GetObjectItem(first, "weighted_reflectance")));
    CHECK(text &&
          strstr(text, "\"spacing_nm\": 355.25, \"weighted_reflectance\": 0.01831")); /* digits as stored */
    cJSON_Delete(array);
    free(text);
}

static void prints_csv(void) {
    int code = -1;
    csv c = { 0 };
    error e = { ST_OK, "" };
    char *text = run(&code, "--csv", NULL, NULL);
    CHECK(code == EXIT_DONE && text && csv_parse(text, strlen(text), "out", &c, &e) == ST_OK);
    CHECK(c.n_rows == 2 && csv_column(&c, "sample") == 0 && csv_column(&c, "etched_at") == 1 &&
          csv_column(&c, "run_at") == 2);
    if (c.n_rows == 2) {
        CHECK(strcmp(csv_cell(&c, 1, csv_column(&c, "weighted_reflectance")), "0.01831") == 0);
        CHECK(strcmp(csv_cell(&c, 0, csv_column(&c, "weighted_reflectance")), "") == 0);
        CHECK(strcmp(csv_cell(&c, 1, csv_column(&c, "note")), "'=1+1") == 0);
        CHECK(strcmp(csv_cell(&c, 0, csv_column(&c, "x_mm")), "-3.5") == 0 &&
              strcmp(csv_cell(&c, 0, csv_column(&c, "note")), "") == 0);
    }
    csv_free(&c);
    free(text);
}

int main(void) {
    int code = -1;
    const char *tmp = getenv("TMPDIR");
    snprintf(folder, sizeof folder, "%s/sward-history-XXXXXX", tmp ? tmp : "/tmp");
    CHECK(mkdtemp(folder) != NULL);
    snprintf(ledger, sizeof ledger, "%s/h.sqlite", folder);
    snprintf(output, sizeof output, "%s/out.txt", folder);
    char *text = run(&code, NULL, NULL, NULL);
    CHECK(code == EXIT_USAGE && text && !text[0] && !file_exists(ledger)); /* looking makes no ledger */
    free(text);
    fill_ledger();
    prints_json();
    prints_csv();
    text = run(&code, NULL, NULL, NULL);
    CHECK(code == EXIT_DONE && text && strstr(text, "355.25") && strstr(text, "1.831") &&
          strstr(text, "2 rows"));
    CHECK(text && strstr(text, "S1") < strstr(text, "S2"));
    free(text);
    text = run(&code, "--lot", "L1", NULL);
    CHECK(code == EXIT_DONE && text && strstr(text, "S1") && !strstr(text, "S2") && strstr(text, "1 row\n"));
    free(text);
    text = run(&code, "--since", "2026-03-15", "--json");
    CHECK(code == EXIT_DONE && text && !strstr(text, "S1") && strstr(text, "S2"));
    free(text);
    text = run(&code, "--lot", "none", "--json");
    CHECK(code == EXIT_DONE && text && strcmp(text, "[\n]\n") == 0);
    free(text);
    text = run(&code, "--lot", "none", "--csv");
    CHECK(code == EXIT_DONE && text && strcmp(text, "sample,etched_at,run_at\n") == 0);
    free(text);
    text = run(&code, "--since", "last week", NULL);
    CHECK(code == EXIT_USAGE && text && !text[0]);
    free(text);
    unlink(ledger);
    unlink(output);
    CHECK(rmdir(folder) == 0);
    return check_done();
}
