/* The page shows the CSV's own digits, survives hostile names, needs nothing from outside, and says why a micrograph or a
 * number is missing. */
#include <stdlib.h>
#include <unistd.h>

#include "base/mem.h"
#include "check.h"
#include "demo_rows.h"
#include "io/file.h"
#include "io/png_write.h"
#include "report/html.h"

static size_t count_of(const char *text, const char *word) {
    size_t n = 0;
    for (const char *p = text; (p = strstr(p, word)); p += strlen(word)) n++;
    return n;
}

static char *page_of(const results *r, const char *dir) {
    error e = { 0 };
    char *path = path_join(dir, "report.html"), *bytes = NULL;
    size_t n = 0;
    CHECK(report_write(r, dir, &e) == ST_OK);
    CHECK(path && file_read(path, (size_t)1 << 24, &bytes, &n, &e) == ST_OK);
    if (path) remove(path);
    free(path);
    char *scripts = bytes ? strstr(bytes, "<script>") : NULL; /* the library's own text is no part of what is checked */
    CHECK(scripts && strstr(scripts, "Chart.js v") && strstr(scripts, "</script>\n</body></html>\n"));
    CHECK(count_of(scripts, "<script>") == 2);
    if (scripts) *scripts = '\0';
    return bytes;
}

static void check_page(demo *d, const char *dir) {
    char *page = page_of(&d->r, dir);
    CHECK(page && strstr(page, "<title>line 3 &amp; &lt;grass&gt;</title>"));
    CHECK(strstr(page, "<data value=\"351.23\">351</data> <span class=\"u\">\xc2\xb1 16</span>")); /* twice the 8.12 of the table */
    CHECK(strstr(page, "value=\"0.012346\">1.2</data> <span class=\"u\">(<data class=\"percent\" value=\"0.0101\">1.0</data> to ")); /* in percent */
    CHECK(strstr(page, "280 to 420 <span class=\"unit\">nm</span>"));
    CHECK(strstr(page, "Verdict as in samples.csv: inside &lt;280..420&gt; nm"));
    CHECK(strstr(page, "1 of 2 samples conform; 1 undecided.</p>"));
    /* hostile names stay text */
    CHECK(!strstr(page, "<img src=x") && !strstr(page, "<grass>") && !strstr(page, "<c.tif>") &&
          !strstr(page, "<b>ab"));
    CHECK(strstr(page, "=a/&lt;img src=x onerror=&quot;alert(1)&quot;&gt;&amp;&#39;\xef\xbf\xbd.tif"));
    CHECK(strstr(page, "<td>&lt;b&gt;</td>")); /* from the manifest */
    /* nothing is fetched */
    CHECK(!strstr(page, "src=\"http") && !strstr(page, "href=\"http") && !strstr(page, "url(") &&
          !strstr(page, "@import"));
    CHECK(strstr(page, "default-src 'none'"));
    /* only the two scripts of the page may run, by their digests */
    CHECK(!strstr(page, "<script") && count_of(page, " 'sha256-") == 2 && !strstr(page, "script-src 'unsafe"));
    /* verdicts by word and sign */
    CHECK(strstr(page, "\xe2\x9c\x93</span> conforms</span>") && strstr(page, "?</span> undecided</span>"));
    /* why something is missing */
    CHECK(
        strstr(page, "<strong>few pixels</strong>: too few pixels per spacing; <strong>blurred</strong>: "));
    CHECK(strstr(page, "unreadable</span> the file ends after 12 bytes"));
    CHECK(count_of(page, " class=\"card ") == DEMO_IMAGES);
    CHECK(strstr(page, "<a href=\"#micrograph-2\">b.png</a> was not used (<span class=\"flag\""));
    CHECK(strstr(page, "<a href=\"#micrograph-3\">c.tif</a> was not used (the file ends after 12 bytes): the file cannot be read"));
    CHECK(strstr(page, "<pre tabindex=\"0\">1 of 2 samples conforms.\nRe-take &lt;c.tif&gt;.</pre>"));
    /* structure: every column explained once, table headers with scope, one h1 */
    CHECK(count_of(page, "<h1>") == 1 && !strstr(page, "<th>Column"));
    CHECK(strstr(page, "<code>weighted_reflectance</code>") && strstr(page, "Front surface only."));
    CHECK(strstr(page, "can kill"));
    CHECK(strstr(page, "aria-label=\"Spacing over the etches\""));
    free(page);
}

/* The etches stand in time order: the second sample was etched first. */
static void check_order(demo *d, const char *dir) {
    d->samples[1].spacing_nm = 333.25;
    d->samples[1].spacing_nm_u = 5.0;
    char *page = page_of(&d->r, dir);
    const char *first = strstr(page, "<title>@etch &lt;2&gt;: 333.25</title>");
    const char *second = strstr(page, "<title>etch 1: 351.235</title>");
    CHECK(first && second && first < second);
    free(page);
    d->r.history_json =
        "[{\"sample\": \"old\", \"etched_at\": \"2026-01-01\", \"spacing_nm\": 300.5, \"spacing_nm_u\": 4, "
        "\"weighted_reflectance\": null, \"verdict\": \"fails\"}]";
    page = page_of(&d->r, dir);
    CHECK(strstr(page, "<title>old: 300.5</title>"));
    free(page);
    d->r.history_json = NULL;
    demo_sample_empty(&d->samples[1]);
}

static void check_empty(const char *dir) {
    results none = { .title = NULL };
    char *page = page_of(&none, dir);
    CHECK(page && strstr(page, "No sample could be formed") && strstr(page, "No micrograph was found"));
    CHECK(!strstr(page, "nan") && !strstr(page, "(null)"));
    free(page);
    image_row dead[2];
    static char file[] = "x.tif", unreadable[] = "unreadable", why[] = "not a picture";
    for (size_t i = 0; i < 2; i++) {
        demo_image_empty(&dead[i]);
        dead[i].file = file;
        dead[i].status = unreadable;
        dead[i].reason = why;
    }
    results all = { .images = dead, .n_images = 2 };
    page = page_of(&all, dir);
    CHECK(page && count_of(page, "</span> not a picture") == 2);
    CHECK(!strstr(page, "(null)"));
    free(page);
}

static void check_picture(demo *d, const char *dir) {
    enum { NX = 1000, NY = 80 };
    uint8_t *rgb = mem_array((size_t)NX * NY, 3);
    for (size_t i = 0; i < (size_t)NX * NY * 3; i++) rgb[i] = (uint8_t)(i % 251);
    char *path = path_join(dir, "o.png");
    error e = { 0 };
    png_format f = { NX, NY, 3, 8, 4.0 };
    CHECK(path && png_write(path, rgb, &f, &e) == ST_OK);
    const char *paths[DEMO_IMAGES] = { "o.png", "missing.png", NULL };
    d->r.overlay_paths = paths;
    char *page = page_of(&d->r, dir);
    d->r.overlay_paths = NULL;
    CHECK(strstr(page, "<a href=\"./o.png\"><img width=\"524\" height=\"42\"") &&
          strstr(page, "data:image/jpeg;base64,/9j/"));
    CHECK(strstr(page, "The overlay could not be read: ") && strstr(page, "no overlay"));
    free(page);
    if (path) remove(path);
    free(path);
    free(rgb);
}

/* A sample that fails says by how much, why that is believed, and what its wafer says: 450 +- 20 against at most 420; a density of
 * 5.5 per um2 is a spacing of 458.2 nm; its two neighbours lie at 350. */
static void check_case(const char *dir) {
    static char names[3][8] = { "x", "y", "z" }, wafer[] = "W1", fails[] = "fails", conforms[] = "conforms";
    static char *extra[2][1] = { { fails }, { conforms } };
    static const char *const extra_names[] = { "verdict_spacing_nm" }, *const targets[] = { "spacing_nm" };
    static const double min = 280.0, max = 420.0;
    sample_row rows[3];
    for (size_t i = 0; i < 3; i++) {
        demo_sample_empty(&rows[i]);
        rows[i].sample = names[i];
        rows[i].wafer = wafer;
        rows[i].spacing_nm = i ? 350.0 : 450.0;
        rows[i].spacing_nm_u = 10.0;
        rows[i].density_per_um2 = 5.5;
        rows[i].n_images = rows[i].n_used = 2;
        rows[i].verdict = i ? conforms : fails;
        rows[i].extra = extra[i != 0];
        rows[i].n_extra = 1;
    }
    results r = { .samples = rows, .n_samples = 3, .sample_extra = extra_names, .n_sample_extra = 1, .target_quantity = targets,
                  .target_min = &min, .target_max = &max, .n_targets = 1 };
    char *page = page_of(&r, dir);
    CHECK(strstr(page, "1 of 3 samples fails; 2 conform.</p>"));
    CHECK(strstr(page, "<dd>30 nm (7.1 % of the limit) above the upper limit of 420 nm.</dd>"));
    CHECK(strstr(page, "430 nm to 470 nm, lies outside the target. 2 of 2 micrographs were used. Counting the features instead gives 458 nm: outside"));
    CHECK(strstr(page, "2 of the 2 other samples of wafer W1 conform (mean 350 nm): the miss is local"));
    free(page);
    rows[0].density_per_um2 = 9.0; /* 358 nm: the two ways contradict each other */
    page = page_of(&r, dir);
    CHECK(strstr(page, "But counting the features gives 358 nm, which is inside"));
    free(page);
}

/* The control chart draws what "series" says: limits of the phase, the note as a line before the second etch, the alarm as a triangle,
 * the sentences as they are. */
static void check_control(demo *d, const char *dir) {
    d->r.series_json =
        "[{\"quantity\": \"spacing_nm\", \"unit\": \"nm\", \"target_min\": 280, \"target_max\": 420, \"phases\": [{\"number\": 1, \"first\": 1, "
        "\"low\": 310.5, \"centre\": 340, \"high\": 369.5, \"why\": \"\"}], \"points\": [{\"number\": 1, \"etched_at\": \"2026-01-02T03:04:05Z\", "
        "\"phase\": 1, \"value\": 341.5, \"sd\": 4, \"alarms\": [], \"excluded\": null}, {\"number\": 2, \"etched_at\": \"2026-01-03T00:00:00Z\", "
        "\"phase\": 1, \"value\": 390.5, \"sd\": null, \"alarms\": [\"beyond\"], \"excluded\": null}], \"notes\": [{\"at\": \"2026-01-02\", "
        "\"kind\": \"change\", \"text\": \"new <gas>\", \"before\": 2}], \"sentences\": [\"ALARM: <E2> lies beyond 3 sigma.\"]}]";
    char *page = page_of(&d->r, dir);
    d->r.series_json = NULL;
    CHECK(strstr(page, "Control chart: Spacing of each etch") && strstr(page, "<li>ALARM: &lt;E2&gt; lies beyond 3 sigma.</li>"));
    CHECK(strstr(page, "<tr data-x=\"0\"><td class=\"t\">mean of an etch<th scope=\"row\">2026-01-02 03:04</th><td>341.5<td>337.5<td>345.5<td class=\"t\">in control"));
    CHECK(strstr(page, "2026-01-03 00:00</th><td>390.5<td><td><td class=\"t\">alarm"));
    CHECK(count_of(page, "<td class=\"t\">upper control limit<th") == 2 && strstr(page, "<td>369.5<td>"));
    CHECK(strstr(page, "{&quot;tone&quot;:1,&quot;at&quot;:0.5,&quot;label&quot;:&quot;new &lt;gas&gt;&quot;}"));
    free(page);
}

/* Three located samples: 300 in the middle, 360 and 380 outside; sd 41.6 of 346.7. Two samples are no map. */
static void check_map(const char *dir) {
    static char names[4][4] = { "a", "b", "c", "d" }, wafer[] = "W<7>";
    static const double spacing[4] = { 300.0, 360.0, 380.0, 340.0 };
    const double x[4] = { 0.0, 50.0, -50.0, MISSING }, y[4] = { 0.0, 0.0, 0.0, 1.0 };
    sample_row rows[4];
    for (size_t i = 0; i < 4; i++) {
        demo_sample_empty(&rows[i]);
        rows[i].sample = names[i];
        rows[i].wafer = wafer;
        rows[i].spacing_nm = spacing[i];
    }
    results r = { .samples = rows, .n_samples = 4, .sample_x_mm = x, .sample_y_mm = y };
    char *page = page_of(&r, dir);
    CHECK(strstr(page, "Spacing in nm at 3 positions; outermost at 50 mm."));
    CHECK(strstr(page, "(1 sd): 12 % of the mean; the edge is wider than the centre by 23 %."));
    CHECK(strstr(page, "Map of the spacing on wafer W&lt;7&gt;") && strstr(page, ">360</text>"));
    free(page);
    r.n_samples = 2;
    page = page_of(&r, dir);
    CHECK(!strstr(page, "Wafer maps"));
    free(page);
}

static void check_html(void) {
    textbuf t = { 0 };
    html_text(&t, "a\xc3\xa9\xe2\x82\xac\xf0\x9f\x98\x80\xc0\xaf\xed\xa0\x80\x01\t\n");
    CHECK(!strcmp(
        t.s,
        "a\xc3\xa9\xe2\x82\xac\xf0\x9f\x98\x80\xef\xbf\xbd\xef\xbf\xbd\xef\xbf\xbd\xef\xbf\xbd\xef\xbf\xbd"
        "\xef\xbf\xbd\t\n"));
    text_free(&t);
    CHECK(html_fit("a\xc3\xa9z", 2) == 3 && html_fit("ab", 9) == 2);
    static const struct {
        const char *plain, *coded;
    } rfc[] = {
        { "f", "Zg==" }, { "fo", "Zm8=" }, { "foo", "Zm9v" }, { "foob", "Zm9vYg==" }, { "foobar", "Zm9vYmFy" }
    };
    for (size_t i = 0; i < sizeof rfc / sizeof rfc[0]; i++) { /* RFC 4648, section 10 */
        text_base64(&t, (const uint8_t *)rfc[i].plain, strlen(rfc[i].plain));
        CHECK(!strcmp(t.s, rfc[i].coded));
        text_free(&t);
    }
}

int main(void) {
    demo d;
    char dir[] = "sward-page-XXXXXX";
    error e = { 0 };
    CHECK(mkdtemp(dir) != NULL);
    demo_make(&d);
    check_page(&d, dir);
    check_order(&d, dir);
    check_empty(dir);
    demo_make(&d);
    check_picture(&d, dir);
    check_map(dir);
    check_case(dir);
    check_control(&d, dir);
    check_html();
    CHECK(rmdir(dir) == 0);
    CHECK_FAILS(report_write(&d.r, "no/such/folder", &e), ST_IO, e, "report.html");
    return check_done();
}
