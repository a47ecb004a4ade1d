/* JSON: lines of keys, each refusal, the emitter, words alike. */
#include "io/json.h"

#include <cjson/cJSON.h>
#include <stdlib.h>

#include "check.h"

static status parse(const char *s, json *j, error *e) { return json_parse(s, strlen(s), "p.json", j, e); }

static void reading(void) {
    json j = { 0 };
    error e = { 0 };
    CHECK(parse("\xef\xbb\xbf{\n \"a\": 1,\n \"b\": { \"c\\\"\": [1, {\"d\":\n 2}],\n\n \"e\" : \"x\\n:\" "
                "},\n \"a2\": null }\n",
                &j, &e) == ST_OK);
    CHECK(j.n_keys == 6);
    const cJSON *b = cJSON_GetObjectItem(j.root, "b");
    CHECK(json_line(&j, b) == 3 && json_line(&j, cJSON_GetObjectItem(b, "e")) == 6);
    CHECK(json_line(&j, cJSON_GetObjectItem(j.root, "a2")) == 7 && json_line(&j, j.root) == 0);
    CHECK(!strcmp(j.nodes[2]->string, "c\"") && !strcmp(j.nodes[3]->string, "d") && j.lines[3] == 3);
    json_free(&j);
    json_free(&j);
    CHECK(parse("{}", &j, &e) == ST_OK && j.n_keys == 0);
    json_free(&j);
    CHECK(parse("{\"a\": {\"x\": 1}, \"b\": {\"x\": 1}}", &j, &e) == ST_OK); /* the same key in two objects */
    json_free(&j);

    CHECK_FAILS(parse("", &j, &e), ST_BAD_INPUT, e, "not JSON");
    CHECK_FAILS(parse("{\n\"a\": 1\n\"b\": 2}", &j, &e), ST_BAD_INPUT, e, "p.json line 3: not JSON");
    CHECK_FAILS(parse("{\"a\": tru}", &j, &e), ST_BAD_INPUT, e, "line 1");
    CHECK_FAILS(parse("{\n\"a\": 1,\n\"b\": 2,\n\"a\": 3}", &j, &e), ST_BAD_INPUT, e,
                "line 4: 'a' stands here and already in line 2");
    CHECK_FAILS(parse("[1]", &j, &e), ST_BAD_INPUT, e, "no object");
    CHECK_FAILS(parse("{}\n{}", &j, &e), ST_BAD_INPUT, e, "line 2: text behind");
    CHECK_FAILS(parse("{\n\"a\": 1e999}", &j, &e), ST_BAD_INPUT, e, "line 2, 'a': the number is too large");
    CHECK_FAILS(json_parse("{\n\0}", 4, "p.json", &j, &e), ST_BAD_INPUT, e, "line 2: a zero byte");
    char deep[200];
    memset(deep, '[', sizeof deep - 1);
    deep[sizeof deep - 1] = '\0';
    CHECK_FAILS(parse(deep, &j, &e), ST_BAD_INPUT, e, "deeper than 64");
    CHECK(!j.root && !j.nodes);
}

static void writing(void) {
    textbuf t = { 0 };
    json_string(&t, "a\"\\\n\t\r\x01 \xc2\xb5 \xff \xe0\x80\x80 \xed\xa0\x80 \xf4\x90\x80\x80");
    CHECK(!strcmp(t.s,
                  "\"a\\\"\\\\\\n\\t\\r\\u0001 \xc2\xb5 \xef\xbf\xbd \xef\xbf\xbd\xef\xbf\xbd\xef\xbf\xbd "
                  "\xef\xbf\xbd\xef\xbf\xbd\xef\xbf\xbd \xef\xbf\xbd\xef\xbf\xbd\xef\xbf\xbd\xef\xbf\xbd\""));
    text_free(&t);
    json_string(&t, NULL);
    json_number(&t, 0.0183112, 4);
    json_number(&t, (double)NAN, 4);
    CHECK(!strcmp(t.s, "null0.01831null"));
    text_free(&t);
}

static void words(void) {
    static const char *const known[] = { "spacing_nm", "density_per_um2", "relief" };
    CHECK(!strcmp(json_nearest("spacing", known, 3) ? json_nearest("spacing", known, 3) : "", "spacing_nm"));
    CHECK(json_nearest("Releif", known, 3) == known[2]);
    CHECK(json_nearest("weather", known, 3) == NULL && json_nearest("", known, 3) == NULL);
}

int main(void) {
    reading();
    writing();
    words();
    return check_done();
}
