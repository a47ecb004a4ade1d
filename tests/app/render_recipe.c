/* Recipes and the command: keys, defaults, mistakes named by line, the files that come out and what truth.json says. */
#include "app/render_recipe.h"

#include <cjson/cJSON.h>
#include <stdlib.h>
#include <sys/wait.h>
#include <unistd.h>

#include "app/command.h"
#include "check.h"
#include "io/file.h"
#include "io/json.h"
#include "io/load.h"

static char folder[] = "render_test_XXXXXX";

static const char *in_folder(const char *name) {
    static char path[2][300];
    static int turn;
    turn = !turn;
    snprintf(path[turn], sizeof path[turn], "%s/%s", folder, name);
    return path[turn];
}

static status read_text(const char *text, recipe *out, error *e) {
    const char *path = in_folder("recipe.json");
    CHECK(file_write(path, text, strlen(text), NULL) == ST_OK);
    return recipe_read(path, out, e);
}

static void reading(void) {
    recipe r = { 0 };
    error e = { 0 };
    CHECK(read_text("{\n\"about\": \"two\",\n\"defaults\": {\"spacing_nm\": 347.5, \"seed\": 40, \"label\": \"lot\"},\n"
                    "\"images\": [\n {\"file\": \"a/b.tif\", \"shape\": 1.7, \"strip\": false, \"bits\": 16},\n"
                    " {\"file\": \"c.PNG\", \"size\": \"640x480\", \"relief\": \"pore\", \"stretch\": \"1.25:-30\","
                    " \"seed\": 7, \"shape\": \"bell\", \"pattern\": \"rsa\", \"label\": \"other\"}]}\n", &r, &e) == ST_OK);
    CHECK(r.n == 2);
    if (r.n == 2) {
        const render_options *a = &r.images[0].options, *b = &r.images[1].options;
        CHECK(!strcmp(r.images[0].file, "a/b.tif") && !strcmp(r.images[0].label, "lot"));
        CHECK_NEAR(a->spacing_nm, 347.5, 1e-12);
        CHECK_NEAR(a->exponent, 1.7, 1e-12);
        CHECK(a->strip == 0 && a->bit_depth == 16 && a->seed == 40 && a->relief == RELIEF_HILLOCK && !a->bell);
        CHECK(b->nx == 640 && b->ny == 480 && b->relief == RELIEF_PORE && b->seed == 7 && b->bell && b->strip == 1);
        CHECK(b->pattern == PATTERN_RSA && !strcmp(r.images[1].label, "other"));
        CHECK_NEAR(b->stretch, 1.25, 1e-12);
        CHECK_NEAR(b->stretch_angle_deg, -30.0, 1e-12);
        textbuf t = { 0 }, whole = { 0 }; /* what is written reads back as the same picture */
        recipe_options_to_json(&r.images[1], 0, &t);
        text_addf(&whole, "{\"defaults\": %s, \"images\": [{\"file\": \"c.png\"}]}", t.s);
        recipe back = { 0 };
        CHECK(read_text(whole.s, &back, &e) == ST_OK && back.n == 1);
        textbuf again = { 0 };
        if (back.n) recipe_options_to_json(&back.images[0], 0, &again);
        CHECK(again.s && !strcmp(again.s, t.s));
        text_free(&t);
        text_free(&whole);
        text_free(&again);
        recipe_free(&back);
    }
    recipe_free(&r);
    CHECK(r.images == NULL && r.n == 0);
}

static void mistakes(void) {
    static const struct { const char *text, *words; } t[] = {
        { "{\n\"images\": [{\"file\": \"a.png\",\n\"spacin_nm\": 3}]}",
          "line 3: 'spacin_nm' is not known; did you mean 'spacing_nm'?" },
        { "{\n\n\"defaults\": {\"qqqqqqqqqqqq\": 3}, \"images\": [{\"file\": \"a.png\"}]}", "line 3: 'qqqqqqqqqqqq' is not known" },
        { "{\"images\": [\n{\"file\": \"a.png\", \"px_nm\": \"wide\"}]}",
          "line 2: px_nm: found 'wide', expected nanometres per pixel" },
        { "{\"images\": [{\"file\": \"a.png\", \"size\": \"1024\"}]}", "expected WIDTHxHEIGHT" },
        { "{\"images\": [{\"file\": \"a.png\", \"bits\": 12}]}", "found '12', expected 8 or 16" },
        { "{\"images\": [{\"file\": \"a.png\", \"strip\": 1}]}", "expected true or false" },
        { "{\"images\": [{\"file\": \"a.png\", \"seed\": 1.5}]}", "expected a whole number" },
        { "{\"images\": [{\"file\": \"a.png\", \"pattern\": \"hexagonal\"}]}", "expected hex, lloyd" },
        { "{\"images\": [{\"file\": \"a.png\", \"stretch\": 1.1}]}", "expected RATIO:DEGREES" },
        { "{\"images\": [{\"file\": \"a.png\", \"noise\": [1]}]}", "expected one value" },
        { "{\"images\": [{\"file\": \"a.png\", \"noise\": null}]}", "expected one value" },
        { "{\"images\": [{\"file\": \"a.png\"},\n\n{\"file\": \"a.png\"}]}", "line 3: file: 'a.png' is used twice" },
        { "{\"images\": [{\"file\": \"../a.png\"}]}", "inside the output folder" },
        { "{\"images\": [{\"file\": \"/a.png\"}]}", "inside the output folder" },
        { "{\"images\": [{\"file\": \"a.jpg\"}]}", "ends in .png" },
        { "{\"images\": [{\"file\": 3}]}", "file: expected a text" },
        { "{\"images\": [{\"spacing_nm\": 300}]}", "image 1: no file name" },
        { "{\"images\": [3]}", "image 1: expected an object" },
        { "{\"images\": []}", "no images" },
        { "{\"defaults\": {}}", "no images" },
        { "{\n\"default\": {}}", "line 2: found 'default', expected about" },
        { "[1]", "" },
        { "{", "" } };
    for (size_t k = 0; k < sizeof t / sizeof t[0]; k++) {
        recipe r = { 0 };
        error e = { 0 };
        CHECK(read_text(t[k].text, &r, &e) == ST_BAD_INPUT && strstr(e.text, t[k].words));
        CHECK(e.text[0] && r.images == NULL);
        if (!strstr(e.text, t[k].words)) printf("case %zu: %s\n", k, e.text);
    }
    recipe r = { 0 };
    error e = { 0 };
    CHECK_FAILS(recipe_read(in_folder("none.json"), &r, &e), ST_BAD_INPUT, e, "no such file");
    CHECK(read_text("{\"images\": [{}]}", &r, NULL) == ST_BAD_INPUT);
}

/* The command in a process of its own, because argp ends it on wrong use. Returns its exit code. */
static int command_code(char **argv) {
    int argc = 0, code = -1;
    while (argv[argc]) argc++;
    fflush(stdout);
    pid_t child = fork();
    if (child == 0) {
        if (!freopen("/dev/null", "w", stdout) || !freopen("/dev/null", "w", stderr)) _exit(99);
        _exit(cmd_render(argc, argv));
    }
    if (child < 0 || waitpid(child, &code, 0) != child || !WIFEXITED(code)) return -1;
    return WEXITSTATUS(code);
}

static char *arg(const char *s) { /* argv wants writable text; the few bytes stay until the end */
    static char room[64][320];
    static size_t n;
    char *p = room[n++ % 64];
    snprintf(p, 320, "%s", s);
    return p;
}

#define RUN(...) command_code((char *[]){ arg("sward render"), __VA_ARGS__, NULL })

static const cJSON *truth_of(const json *j, int image) {
    return cJSON_GetArrayItem(cJSON_GetObjectItemCaseSensitive(j->root, "images"), image);
}

static double truth_number(const cJSON *image, const char *key) {
    const cJSON *v = cJSON_GetObjectItemCaseSensitive(image, key);
    return cJSON_IsNumber(v) ? v->valuedouble : (double)NAN;
}

static void files(void) {
    char *bytes[2] = { NULL, NULL };
    size_t n[2] = { 0, 0 };
    error e = { 0 };
    CHECK(RUN(arg("--out"), arg(folder), arg("--size"), arg("320x240"), arg("--spacing"), arg("160"), arg("--noise"),
              arg("80"), arg("--count"), arg("2"), arg("--name"), arg("sub/x"), arg("--seed"), arg("5"),
              arg("--centres")) == EXIT_DONE);
    CHECK(file_read(in_folder("truth.json"), 1 << 20, &bytes[0], &n[0], &e) == ST_OK);
    json j = { 0 };
    CHECK(json_parse(bytes[0], n[0], "truth.json", &j, &e) == ST_OK);
    const cJSON *image = truth_of(&j, 0);
    CHECK(truth_of(&j, 1) && !truth_of(&j, 2));
    CHECK_NEAR(truth_number(image, "spacing_nm"), 160.0, 0.8);
    CHECK_NEAR(truth_number(image, "density_per_um2"), 2.0 / sqrt(3.0) / 0.16 / 0.16, 0.45);
    CHECK_NEAR(truth_number(image, "n_features"), cJSON_GetArraySize(cJSON_GetObjectItemCaseSensitive(image, "centres_px")), 0.0);
    CHECK(truth_number(image, "size_d10_nm") < truth_number(image, "size_d50_nm"));
    CHECK_NEAR(truth_number(image, "size_d50_nm"), 1.03 * 160.0, 8.0);
    micrograph m = { 0 };
    load_options o = load_defaults();
    CHECK(load_file(in_folder("sub/x_001.png"), &o, &m, &e) == ST_OK);
    CHECK_NEAR(m.px_nm, 8.0, 0.01);
    CHECK(m.nx == 320 && m.bit_depth == 8 && m.file_ny == 240 + (size_t)truth_number(image, "strip_px"));
    micrograph_free(&m);
    json_free(&j);
    /* truth.json of one image is the recipe of the same image */
    CHECK(file_read(in_folder("sub/x_002.png"), 1 << 22, &bytes[1], &n[1], &e) == ST_OK);
    CHECK(RUN(arg("--out"), arg(folder), arg("--size"), arg("320x240"), arg("--spacing"), arg("160"), arg("--noise"),
              arg("80"), arg("--seed"), arg("6")) == EXIT_DONE);
    free(bytes[0]);
    CHECK(file_read(in_folder("render_001.png"), 1 << 22, &bytes[0], &n[0], &e) == ST_OK);
    CHECK(n[0] == n[1] && bytes[0] && bytes[1] && !memcmp(bytes[0], bytes[1], n[0]));
    free(bytes[0]);
    free(bytes[1]);
}

static void formats(void) {
    error e = { 0 };
    micrograph m = { 0 };
    load_options o = load_defaults();
    CHECK(RUN(arg("-o"), arg(folder), arg("--size"), arg("160x120"), arg("--spacing"), arg("160"), arg("--bits"),
              arg("16"), arg("--format"), arg("tiff"), arg("--no-strip"), arg("--px"), arg("12.5")) == EXIT_DONE);
    CHECK(load_file(in_folder("render_001.tif"), &o, &m, &e) == ST_OK);
    CHECK_NEAR(m.px_nm, 12.5, 0.01);
    CHECK(m.nx == 160 && m.ny == 120 && m.bit_depth == 16);
    micrograph_free(&m);
    CHECK(RUN(arg("-o"), arg(folder), arg("--size"), arg("160x120"), arg("--spacing"), arg("160"),
              arg("--no-scale")) == EXIT_DONE);
    CHECK(load_file(in_folder("render_001.png"), &o, &m, &e) == ST_OK);
    CHECK(isnan(m.px_nm));
    micrograph_free(&m);
}

static void wrong_use(void) {
    CHECK(RUN(arg("--size"), arg("160x120")) == EXIT_USAGE); /* no --out */
    CHECK(RUN(arg("--out"), arg(folder), arg("more")) == EXIT_USAGE);
    CHECK(RUN(arg("--out"), arg(folder), arg("--shape"), arg("cube")) == EXIT_USAGE);
    CHECK(RUN(arg("--out"), arg(folder), arg("--count"), arg("0")) == EXIT_USAGE);
    CHECK(RUN(arg("--out"), arg(folder), arg("--format"), arg("gif")) == EXIT_USAGE);
    CHECK(RUN(arg("--out"), arg(folder), arg("--nosuch")) == EXIT_USAGE);
    CHECK(RUN(arg("--out"), arg(folder), arg("--recipe"), arg("r.json"), arg("--px"), arg("3")) == EXIT_USAGE);
    CHECK(RUN(arg("--out"), arg(folder), arg("--name"), arg("../x")) == EXIT_USAGE);
    CHECK(RUN(arg("--out"), arg(folder), arg("--pattern"), arg("rsa"), arg("--disorder"), arg("0.9")) == EXIT_USAGE);
    CHECK(RUN(arg("--out"), arg(folder), arg("--recipe"), arg(in_folder("none.json"))) == EXIT_USAGE);
    CHECK(file_write(in_folder("plain"), "x", 1, NULL) == ST_OK);
    CHECK(RUN(arg("--out"), arg(in_folder("plain/below")), arg("--size"), arg("160x120"), arg("--spacing"),
              arg("160")) == EXIT_FAILED);
}

static void clean(void) {
    static const char *const names[] = { "recipe.json", "truth.json", "render_001.png", "render_001.tif", "plain",
                                         "sub/x_001.png", "sub/x_002.png", "sub" };
    for (size_t k = 0; k < sizeof names / sizeof names[0]; k++) remove(in_folder(names[k]));
    CHECK(rmdir(folder) == 0); /* nothing but the files asked for */
}

int main(void) {
    if (!mkdtemp(folder)) return 1;
    argp_err_exit_status = EXIT_USAGE; /* as the program does */
    reading();
    mistakes();
    files();
    formats();
    wrong_use();
    clean();
    return check_done();
}
