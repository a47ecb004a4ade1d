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
static char *run_words(int *code, const char *const *words, size_t n_words) {
    char name[] = "sward history", option[] = "--history";
    char room[8][220];
    char *argv[12] = { name, option, ledger };
    int argc = 3;
    for (size_t i = 0; i < n_words && i < 8; i++) {
        snprintf(room[i], sizeof room[i], "%s", words[i]);
        argv[argc++] = room[i];
    }
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

static char *run(int *code, const char *a, const char *b, const char *c) {
    const char *words[] = { a, b, c };
    return run_words(code, words, (size_t)((a != NULL) + (b != NULL) + (c != NULL)));
}
#define RUN(code, ...)                                                                                       \
    run_words((code), (const char *const[]){ __VA_ARGS__ },                                                  \
              sizeof((const char *const[]){ __VA_ARGS__ }) / sizeof(const char *))

static int holds(const char *text, const char *words) {
    int there = text && strstr(text, words) != NULL;
    if (!there) printf("'%s' is not in:\n%s\n", words, text ? text : "(nothing)");
    return there;
}

static void fill_ledger(void) {
    static const history_row rows[] = {
        { .sample = "S2", .lot = "L2", .wafer = "4", .etched_at = "2026-03-15T08:00:00Z", .run_at = "2026-04-01T10:00:00Z",
          .fingerprint = "f2", .version = "0.1.0", .protocol = "line 3", .spacing_nm = 355.25, .spacing_nm_u = 8.1,
          .density_per_um2 = 9.1, .size_d50_nm = 340.5, .weighted_reflectance = 0.01831, .verdict = "conforms",
          .row_json = "{\"sample\": \"S2\", \"lot\": \"L2\", \"etched_at\": \"2026-03-15T08:00:00Z\", \"spacing_nm\": 355.25, "
                      "\"weighted_reflectance\": 0.01831, \"note\": \"=1+1\"}" },
        { .sample = "S1", .lot = "L1", .wafer = "3", .etched_at = "2026-03-14T08:00:00Z", .run_at = "2026-04-01T10:00:00Z",
          .fingerprint = "f1", .version = "0.1.0", .protocol = "line 3", .spacing_nm = 351.2, .spacing_nm_u = 7.7,
          .density_per_um2 = 9.3, .size_d50_nm = 338.1, .weighted_reflectance = MISSING, .verdict = "fails",
          .row_json = "{\"sample\": \"S1\", \"lot\": \"L1\", \"etched_at\": \"2026-03-14T08:00:00Z\", \"spacing_nm\": 351.2, "
                      "\"weighted_reflectance\": null, \"x_mm\": \"-3.5\"}" } };
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

/* Twelve etches: 350 -+ 2, from the eighth on 4 nm more each; etch_s 100 + 10 i is a carried-along column, so text. */
static void fill_process(void) {
    history *h = NULL;
    size_t added = 0;
    error e = { ST_OK, "" };
    CHECK(history_open(ledger, 0, &h, &e) == ST_OK);
    for (int i = 0; i < 12; i++) {
        char sample[8], time[32], json[300];
        double v = 350.0 + (i % 2 ? 2.0 : -2.0) + (i >= 7 ? 4.0 * (i - 6) : 0.0);
        snprintf(sample, sizeof sample, "P%02d", i);
        snprintf(time, sizeof time, "2026-05-%02dT08:00:00Z", i + 1);
        snprintf(json, sizeof json, "{\"sample\": \"%s\", \"lot\": \"%s\", \"spacing_nm\": %.1f, \"etch_s\": \"%d\", \"recipe\": \"%s\"}",
                 sample, i < 6 ? "M1" : "M2", v, 100 + 10 * i, i < 5 ? "R1" : "R2");
        history_row row = { .sample = sample, .lot = i < 6 ? "M1" : "M2", .wafer = "", .etched_at = time, .run_at = "2026-06-01T00:00:00Z",
                            .fingerprint = "f", .version = "0.1.0", .protocol = "p", .spacing_nm = v, .spacing_nm_u = 8.0,
                            .density_per_um2 = MISSING, .size_d50_nm = MISSING, .weighted_reflectance = MISSING,
                            .verdict = "conforms", .row_json = json };
        CHECK(history_add(h, &row, 1, &added, &e) == ST_OK && added == 1);
    }
    history_close(h);
}

static void follows_the_process(void) {
    int code = -1;
    fill_process();
    char *text = RUN(&code, "chart", "spacing_nm", "--since", "2026-05-01", "--baseline=5");
    CHECK(code == EXIT_DONE && holds(text, "Phase 2, from: recipe R2. spacing: centre") && holds(text, "pattern tests alone give one in about 92"));
    CHECK(holds(text, "ALARM: P11") && holds(text, "no clear drift: +4 nm per etch (95 %: 0 to 8)") && holds(text, "newest phase"));
    free(text);
    text = RUN(&code, "exclude", "P11", "--reason", "wrong gas", "--by", "KL");
    CHECK(code == EXIT_DONE && holds(text, "P11 is excluded from charts"));
    free(text);
    text = RUN(&code, "chart", "--since=2026-05-01", "--baseline=5", "--min=300", "--max=420");
    CHECK(code == EXIT_DONE && holds(text, "excluded: wrong gas (KL)") && text && !strstr(text, "ALARM: P11") && holds(text, "Ppk "));
    free(text);
    text = RUN(&code, "--since", "2026-05-01");
    CHECK(code == EXIT_DONE && holds(text, "12 rows") && holds(text, "excluded: wrong gas (KL)")); /* nothing is deleted */
    free(text);
    text = RUN(&code, "include", "P11", "--reason=it was right", "--by=KL");
    CHECK(code == EXIT_DONE && holds(text, "back in"));
    free(text);
    text = RUN(&code, "note", "--at=2026-05-09T00:00:00Z", "--text=chamber clean");
    CHECK(code == EXIT_DONE && holds(text, "noted at 2026-05-09T00:00:00Z (change): chamber clean"));
    free(text);
    text = RUN(&code, "note", "--at=2026-05-10T00:00:00Z", "--text=warm", "--kind=remark", "--by=KL");
    CHECK(code == EXIT_DONE);
    free(text);
    text = RUN(&code, "notes");
    CHECK(code == EXIT_DONE && holds(text, "remark  warm (KL)") && holds(text, "2 notes"));
    free(text);
    text = RUN(&code, "notes", "--json");
    cJSON *list = cJSON_Parse(text);
    CHECK(code == EXIT_DONE && cJSON_GetArraySize(list) == 2 && holds(text, "\"kind\": \"remark\", \"text\": \"warm\", \"initials\": \"KL\"}"));
    cJSON_Delete(list);
    free(text);
    text = RUN(&code, "chart", "--since=2026-05-01", "--json", "--rules=iso,ewma");
    cJSON *chart = cJSON_Parse(text);
    const cJSON *phases = cJSON_GetObjectItem(chart, "phases"), *rules = cJSON_GetObjectItem(chart, "rules");
    CHECK(code == EXIT_DONE && cJSON_GetArraySize(phases) == 3 && cJSON_GetArraySize(rules) == 4);
    CHECK(cJSON_GetArraySize(cJSON_GetObjectItem(chart, "points")) == 12);
    const cJSON *why = cJSON_GetObjectItem(cJSON_GetArrayItem(phases, 2), "why");
    CHECK(cJSON_IsString(why) && !strcmp(why->valuestring, "chamber clean")); /* the remark starts none */
    cJSON_Delete(chart);
    free(text);
}

static void compares(void) {
    int code = -1;
    char *text = RUN(&code, "change", "M1", "M2");
    CHECK(code == EXIT_DONE && holds(text, "spacing of M2: 360 nm (6), of M1: 350 nm (6)"));
    free(text);
    text = RUN(&code, "change", "R1", "R2", "spacing_nm", "--json");
    CHECK(code == EXIT_DONE && holds(text, "\"n_a\": 5, \"n_b\": 7"));
    free(text);
    text = RUN(&code, "setting", "etch_s", "--target=360");
    CHECK(code == EXIT_DONE && holds(text, "the etch_s that brings spacing to 360 nm: ") && holds(text, "a qualified person decides"));
    free(text);
    text = RUN(&code, "setting", "etch_s", "--target=700");
    CHECK(code == EXIT_DONE && holds(text, "outside the data"));
    free(text);
    static const char *const wrong[][4] = { { "chrt" }, { "chart", "spacing" }, { "chart", "a", "b" }, { "change", "M1" },
                                            { "change", "M1", "nowhere" }, { "exclude", "P11" }, { "note" },
                                            { "setting", "etch" }, { "chart", "--rules=zoned" }, { "verify", "nowhere" } };
    for (size_t i = 0; i < sizeof wrong / sizeof wrong[0]; i++) {
        size_t n = 0;
        while (n < 4 && wrong[i][n]) n++;
        text = run_words(&code, wrong[i], n);
        CHECK(code == EXIT_USAGE && text && !text[0]);
        free(text);
    }
}

static void put(const char *name, const char *text) {
    char path[400];
    error e = { ST_OK, "" };
    snprintf(path, sizeof path, "%s/%s", folder, name);
    CHECK(file_write(path, text, strlen(text), &e) == ST_OK);
}

/* Numbers from before come in once, marked; comparisons count etches. */
static void imports(void) {
    int code = -1;
    char sheet[4000], file[400];
    size_t n = (size_t)snprintf(sheet, sizeof sheet, "sample,lot,wafer,position,etched_at,spacing_nm,recipe,etch_s,run_at\n");
    for (int i = 0; i < 10; i++) /* per etch three positions, 1 nm apart; 10 nm per 10 s */
        for (int k = 0; k < 3; k++)
            n += (size_t)snprintf(sheet + n, sizeof sheet - n, "I%d%c,%s,%d,%c,2025-02-%02dT08:00:00Z,%.1f,I,%d,\n", i, "CME"[k], i < 5 ? "IA" : "IB", i,
                                  "CME"[k], i + 1, 300.0 + 10.0 * i + (i % 2 ? 2.0 : -2.0) + k - 1.0, 100 + 10 * i);
    put("old.csv", sheet);
    snprintf(file, sizeof file, "%s/old.csv", folder);
    char *text = RUN(&code, "import", file, "--protocol", "ruler");
    CHECK(code == EXIT_DONE && holds(text, "30 of 30 rows are new"));
    free(text);
    text = RUN(&code, "import", file);
    CHECK(code == EXIT_DONE && holds(text, "0 of 30 rows are new"));
    free(text);
    text = RUN(&code, "--protocol=ruler", "--json");
    CHECK(code == EXIT_DONE && holds(text, "\"protocol\": \"ruler\", \"protocol_sha256\": null, \"version\": \"imported\", \"sample\": \"I0C\""));
    CHECK(holds(text, "\"imported_from\": \"old.csv\"") && holds(text, "\"spacing_nm\": 297, ") && holds(text, "\"etch_s\": \"100\""));
    free(text);
    text = RUN(&code, "change", "IA", "IB");
    CHECK(code == EXIT_DONE && holds(text, "of IB: 370.4 nm (5), of IA: 319.6 nm (5)") && holds(text, "20 further samples of the same etches"));
    free(text);
    text = RUN(&code, "setting", "etch_s", "--lot=IA", "--value=120", "--target=325", "--json");
    cJSON *line = cJSON_Parse(text);
    CHECK(code == EXIT_DONE && cJSON_GetObjectItem(line, "n") && cJSON_GetObjectItem(line, "n")->valueint == 5);
    CHECK(cJSON_GetObjectItem(line, "expected") && cJSON_GetObjectItem(line, "there"));
    cJSON_Delete(line);
    free(text);
    text = RUN(&code, "setting", "etch_s", "--lot=IA", "--value=220");
    CHECK(code == EXIT_DONE && holds(text, "nothing is said at 220: the data reach from 100 to 140"));
    free(text);
    put("bad.csv", "sample,etched_at,spacing_nm\nX,2025-01-01,351\nY,2025-01-02,many\n");
    snprintf(file, sizeof file, "%s/bad.csv", folder);
    text = RUN(&code, "import", file);
    CHECK(code == EXIT_USAGE); /* and nothing of it came in */
    free(text);
    text = RUN(&code, "--since=2025-01-01", "--until=2025-01-31");
    CHECK(code == EXIT_DONE && holds(text, "0 rows"));
    free(text);
    put("bad.csv", "sample,spacing_nm\nX,351\n");
    text = RUN(&code, "import", file);
    CHECK(code == EXIT_USAGE);
    free(text);
    unlink(file);
    snprintf(file, sizeof file, "%s/old.csv", folder);
    unlink(file);
}

/* Another protocol: the newer row counts, the older one stays until it is pruned. */
static void supersedes(void) {
    int code = -1;
    history *h = NULL;
    size_t added = 0;
    error e = { ST_OK, "" };
    history_row again = { .sample = "S1", .lot = "L1", .wafer = "3", .etched_at = "2026-03-14T08:00:00Z", .run_at = "2026-07-01T10:00:00Z",
                          .fingerprint = "f9", .version = "0.2.0", .protocol = "line 4", .protocol_sha256 = "abcdef0123456789", .spacing_nm = 353.2,
                          .spacing_nm_u = 7.7, .density_per_um2 = MISSING, .size_d50_nm = MISSING, .weighted_reflectance = MISSING,
                          .verdict = "conforms", .row_json = "{\"sample\": \"S1\", \"spacing_nm\": 353.2}" };
    CHECK(history_open(ledger, 0, &h, &e) == ST_OK && history_add(h, &again, 1, &added, &e) == ST_OK && added == 1);
    history_close(h);
    char *text = RUN(&code, "differences");
    CHECK(code == EXIT_DONE && holds(text, "351.2 -> 353.2") && holds(text, "+2  line 3 (0.1.0) -> line 4 (abcdef01, 0.2.0)"));
    CHECK(holds(text, "1 etch was run again"));
    free(text);
    text = RUN(&code, "differences", "--json");
    CHECK(code == EXIT_DONE && holds(text, "\"difference\": 2}"));
    free(text);
    text = RUN(&code, "chart", "--until=2026-03-20", "--since=2026-03-01", "--json", "--rules=none");
    CHECK(code == EXIT_DONE && holds(text, "\"value\": 353.2") && text && !strstr(text, "\"value\": 351.2"));
    free(text);
    text = RUN(&code, "prune", "--superseded");
    CHECK(code == EXIT_DONE && holds(text, "1 row would go; nothing was deleted"));
    free(text);
    text = RUN(&code, "prune", "--superseded", "--yes");
    CHECK(code == EXIT_USAGE);
    free(text);
    text = RUN(&code, "prune");
    CHECK(code == EXIT_USAGE);
    free(text);
    text = RUN(&code, "prune", "--superseded", "--yes", "--reason=disk", "--by=KL");
    CHECK(code == EXIT_DONE && holds(text, "1 row deleted"));
    free(text);
    text = RUN(&code, "differences");
    CHECK(code == EXIT_DONE && holds(text, "0 etches were run again"));
    free(text);
}

/* Every micrograph the ledger knows, where it was or in a folder named. */
static void verifies_ledger(void) {
    int code = -1;
    char hash[65];
    history *h = NULL;
    size_t added = 0;
    error e = { ST_OK, "" };
    sha256_hex("abc", 3, hash);
    put("v.png", "abc");
    const history_micrograph files[] = { { "v.png", hash, "tiff", 8.0, 1 }, { "gone.png", hash, "tiff", 8.0, 1 }, { "none.png", "", "", MISSING, 0 } };
    history_row r = { .sample = "V", .lot = "LV", .etched_at = "2024-01-01", .run_at = "2024-01-02", .fingerprint = "f", .version = "0.1.0",
                      .protocol = "p", .folder = folder, .spacing_nm = MISSING, .spacing_nm_u = MISSING, .density_per_um2 = MISSING,
                      .size_d50_nm = MISSING, .weighted_reflectance = MISSING, .verdict = "no_target", .row_json = "{}",
                      .micrographs = files, .n_micrographs = 3 };
    CHECK(history_open(ledger, 0, &h, &e) == ST_OK && history_add(h, &r, 1, &added, &e) == ST_OK && added == 1);
    history_close(h);
    char *text = RUN(&code, "verify");
    CHECK(code == EXIT_PARTIAL && holds(text, "gone.png is gone") && holds(text, "1 micrographs are the ones that were measured, 1 are not"));
    free(text);
    put("gone.png", "abd");
    text = RUN(&code, "verify", "--folder", folder, "--lot", "LV");
    CHECK(code == EXIT_PARTIAL && holds(text, "gone.png differs"));
    free(text);
    put("gone.png", "abc");
    text = RUN(&code, "verify");
    CHECK(code == EXIT_DONE && holds(text, "2 micrographs are"));
    free(text);
    static const char *const names[] = { "v.png", "gone.png" };
    for (size_t i = 0; i < 2; i++) {
        char path[400];
        snprintf(path, sizeof path, "%s/%s", folder, names[i]);
        unlink(path);
    }
}

static void verifies(void) {
    int code = -1;
    error e = { ST_OK, "" };
    char path[4][300], json[600], hash[65];
    static const char *const names[] = { "results.json", "run.json", "a.png", "b.png" };
    for (size_t i = 0; i < 4; i++) snprintf(path[i], sizeof path[i], "%s/%s", folder, names[i]);
    sha256_hex("abc", 3, hash);
    snprintf(json, sizeof json, "{\"manifest\": {\"inputs\": [{\"file\": \"a.png\", \"sha256\": \"%s\"}, {\"file\": \"b.png\", "
             "\"sha256\": \"%s\"}, {\"file\": \"broken.png\", \"sha256\": null}]}}", hash, hash);
    CHECK(file_write(path[0], json, strlen(json), &e) == ST_OK && file_write(path[2], "abc", 3, &e) == ST_OK);
    snprintf(json, sizeof json, "{\"folder\": \"%s\"}", folder);
    CHECK(file_write(path[1], json, strlen(json), &e) == ST_OK && file_write(path[3], "abc", 3, &e) == ST_OK);
    char *text = RUN(&code, "verify", folder);
    CHECK(code == EXIT_DONE && holds(text, "2 micrographs are the ones that were measured, 0 are not"));
    free(text);
    CHECK(file_write(path[3], "abd", 3, &e) == ST_OK && unlink(path[2]) == 0);
    text = RUN(&code, "verify", folder, "--folder", folder);
    CHECK(code == EXIT_PARTIAL && holds(text, "a.png is gone") && holds(text, "b.png differs") && holds(text, "2 are not"));
    free(text);
    unlink(path[0]);
    unlink(path[1]);
    unlink(path[3]);
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
    CHECK(code == EXIT_DONE && text && strcmp(text, "sample,etched_at,run_at,excluded\n") == 0);
    free(text);
    text = run(&code, "--since", "last week", NULL);
    CHECK(code == EXIT_USAGE && text && !text[0]);
    free(text);
    follows_the_process();
    compares();
    supersedes();
    verifies_ledger();
    imports();
    verifies();
    unlink(ledger);
    unlink(output);
    CHECK(rmdir(folder) == 0);
    return check_done();
}
