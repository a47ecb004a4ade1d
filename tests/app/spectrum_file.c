/* Spectra in every dialect, each refusal, and wounded files: a spectrum or a sentence, always. */
#include <stdlib.h>

#include "app/spectrum_file.h"
#include "base/mem.h"
#include "check.h"

static status parse(const char *text, spectrum *s, error *e) {
    *e = (error){ 0 };
    return spectrum_parse(text, strlen(text), "s.csv", s, e);
}

/* The three wavelengths 400.5, 500, 600 with 0.0312, 0.021, 0.1 however they are written. */
static void same(const char *text, const char *note) {
    spectrum s = { 0 };
    error e;
    CHECK(parse(text, &s, &e) == ST_OK);
    if (e.code != ST_OK) {
        printf("%s\nin: %s\n", e.text, text);
        return;
    }
    CHECK(s.n == 3);
    CHECK_NEAR(s.wavelength_nm[0], 400.5, 1e-9);
    CHECK_NEAR(s.wavelength_nm[2], 600.0, 1e-9);
    CHECK_NEAR(s.R[0], 0.0312, 1e-12);
    CHECK_NEAR(s.R[1], 0.021, 1e-12);
    CHECK_NEAR(s.R[2], 0.1, 1e-12);
    check_true(!strcmp(s.note, note), s.note, __FILE__, __LINE__);
    spectrum_free(&s);
    spectrum_free(&s);
}

static void dialects(void) {
    same("wavelength_nm,reflectance\n400.5,0.0312\n500,0.021\n600,0.1\n", "");
    same("400.5,0.0312\r\n500,0.021\r\n600,0.1", "");                                     /* no header, no last break */
    same("\xef\xbb\xbfwavelength_nm,R\r400.5,0.0312\r500,0.021\r600,0.1\r", "");          /* BOM, old breaks */
    same("nm;R\n400,5;0,0312\n500;0,021\n600;0,1\n", "decimal comma");
    same("nm\tR\n400.5\t0.0312\n500\t0.021\n600\t0.1\n", "");
    same("400.5  0.0312\n500    0.021\n600    0.1\n", "");
    same("400,5 0,0312\n500,0 0,021\n600,0 0,1\n", "decimal comma");
    same("400.5, 0.0312\n500, 0.021\n600, 0.1\n", "");
    same("\"nm\",\"R\"\n\"400.5\",\"0.0312\"\n\"500\",\"0.021\"\n\"600\",\"0.1\"\n", "");
    same("nm,%R\n600,10\n500,2.1\n400.5,3.12\n", "percent, descending");
    same("nm,R\n400.5,3.12\n500,2.1\n600,10\n", "percent");
    same("nm,R\n400.5,3.12%\n500,2.1%\n600,10%\n", "percent");
    same("Wavelength (um),Reflectance\n0.4005,0.0312\n0.5,0.021\n0.6,0.1\n", "um");
    same("0.4005;0,0312\n0,5;0,021\n0,6;0,1\n", "um, decimal comma");
    same("600,0.1\n400.5,0.0312\n500,0.021\n", "descending");
    same("600,0.1\n400.5,0.03\n500,0.021\n400.5,0.0324\n", "descending, 1 duplicate averaged");
    same("# a comment\nSample: W1\nDate: 2026-03-14\n2026-03-14 09:30\nScan 3, 2 nm\n\nWavelength/nm,R/%\n400.5,3.12\n500,2.1\n"
         "600,10\n",
         "percent");
    same("Zeit;Wellenl\xc3\xa4nge [nm];Reflexionsgrad [%];Sigma\n1;400,5;3,12;0,1\n2;500;2,1;0,1\n3;600;10;0,1\n",
         "percent, decimal comma");
    same("nm,R\n400.5,0.0312\n410,NaN\n420,\n430, -- \n500,0.021\n600,0.1\n610,#N/A\n", "4 without a value left out");
    same("R,nm\n0.0312,400.5\n0.021,500\n0.1,600\n", "");
    same("nm,R,\n400.5,0.0312,\n500,0.021,\n600,0.1,\n", "");
}

/* Percent below 1.5 all over: only the header can say it. */
static void black(void) {
    spectrum s = { 0 };
    error e;
    CHECK(parse("nm,R (%)\n400,0.8\n500,0.31\n", &s, &e) == ST_OK && strstr(s.note, "percent"));
    CHECK_NEAR(s.R[0], 0.008, 1e-12);
    spectrum_free(&s);
    CHECK(parse("nm,R\n400,0.8\n500,0.71\n", &s, &e) == ST_OK && strstr(s.note, "is it percent?"));
    spectrum_free(&s);
    CHECK(parse("nm,R\n400,-0.001\n500,0.71\n", &s, &e) == ST_OK);
    CHECK_NEAR(s.R[0], -0.001, 0.0);
    spectrum_free(&s);
    CHECK_FAILS(parse("nm,R\n400,1.2\n500,0.31\n", &s, &e), ST_BAD_INPUT, e, "write % into the header");
}

static void refusals(void) {
    static const struct { const char *text, *words; } cases[] = {
        { "", "no line begins with a number" },
        { "nm,R\nred,blue\n", "no line begins with a number" },
        { "nm,R\n400,0.1\n500,abc\n", "no line begins" }, /* one line of numbers alone is no block */
        { "nm,R\n400,0.1\n450,0.1\n500,abc\n", "line 4: found 'abc', expected a reflectance" },
        { "nm,R\n400,0.1\n450,0.1\nend of file\n", "line 4: found 'end of file', expected a wavelength" },
        { "nm,R\n400,0.1\n450,\n500,nan\n", "single wavelength" },
        { "nm,R\n450,0.1\n500,0.1\nnan,0.1\n", "line 4: found 'nan', expected a wavelength" },
        { "nm,R\n400,0.1\n450\n500,0.1\n", "line 3: found '', expected a reflectance" },
        { "nm,R\n400,0.1\n-450,0.1\n", "line 3: found the wavelength -450" },
        { "nm,R\n400,0.1\n45000,0.1\n", "line 3: found the wavelength 45000" },
        { "nm,R\n0.4,0.1\n12,0.1\n", "line 2: found the wavelength 0.4" },
        { "nm,R\n400,0.1\n450,-0.3\n", "line 3: found the reflectance -0.3, expected 0 to 1" },
        { "nm,R\n400,10\n450,130\n", "line 3: found the reflectance 130, expected 0 to 100 percent" },
        { "nm,R\n400,0.1\n400,0.3\n", "lines 2 and 3 give different reflectances for 400 nm" },
        { "nm,R\n400,0.1\n400,0.1\n", "single wavelength" },
        { "nm\n400\n500\n", "one number alone" },
        { "nm,T\n400,0.1,0.2\n500,0.1,0.2\n", "none is named reflectance" },
        { "nm,R1,R2\n400,0.1,0.2\n500,0.1,0.2\n", "none is named reflectance" },
        { "nm,reflectance a,reflectance b\n400,0.1,0.2\n500,0.1,0.2\n", "two columns speak of reflectance" },
        { "nm,Transmittance\n400,0.1\n500,0.1\n", "'transmittance', expected a reflectance" },
        { "Wavenumber (cm-1),R\n400,0.1\n500,0.1\n", "expected wavelengths in nm" },
        { "Energy (eV),R\n3,0.1\n2,0.1\n", "expected wavelengths in nm" },
        { "reflectance,transmittance\n0.1,0.1\n0.2,0.1\n", "one column serves for wavelength and reflectance" },
        { "400,5,0,0312\n500,0,0,021\n", "commas between numbers or within them" },
    };
    spectrum s = { 0 };
    error e;
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        CHECK(parse(cases[i].text, &s, &e) == ST_BAD_INPUT && strstr(e.text, cases[i].words));
        if (!strstr(e.text, cases[i].words)) printf("case %zu: '%s', wanted '%s'\n", i, e.text, cases[i].words);
        CHECK(s.R == NULL && strstr(e.text, "s.csv") != NULL);
    }
    e = (error){ 0 };
    CHECK(spectrum_parse("4\0" "0,0\0.1", 8, "s.csv", &s, &e) == ST_BAD_INPUT && strstr(e.text, "zero bytes"));
    CHECK_FAILS(spectrum_read("/nowhere/W1.csv", &s, &e), ST_BAD_INPUT, e, "there is no such file");
    for (size_t n = 1; n < 10; n++) {
        mem_fail_after(n);
        status st = parse("nm,R\n400,0.1\n500,0.2\n", &s, &e);
        mem_fail_after(0);
        CHECK(st == ST_OK || st == ST_NO_MEMORY);
        spectrum_free(&s);
    }
}

/* Bytes changed, cut out, doubled: a failure has a sentence, a success an ascending spectrum within its range. */
static void wounded(void) {
    static const char *const seeds[] = {
        "Sample: W1\nDate: 2026-03-14\nWavelength [nm];%R\n1000,0;12,5\n900,0;3,12\n800,0;2,10\n700,0;10,0\n",
        "# c\n\"nm\",\"R\"\n400.5,0.0312\n500,0.021\n600,0.1\n600,0.11\n",
        "0.4005\t0.0312\n0.5\t0.021\n0.6\t0.1\n",
    };
    static const char alphabet[] = "0123456789.,;\t \n\r\"#%eE+-Rnmu\xc2\xb5";
    unsigned long long state = 20260301;
    size_t good = 0, bad = 0;
    for (int round = 0; round < 6000; round++) {
        char text[256];
        size_t n = strlen(seeds[round % 3]);
        memcpy(text, seeds[round % 3], n);
        for (int k = 0; k < 1 + round % 5; k++) {
            state = state * 6364136223846793005ULL + 1442695040888963407ULL;
            size_t at = (size_t)(state >> 33) % n, what = (size_t)(state >> 20) % 3;
            if (what == 0) text[at] = alphabet[(state >> 40) % (sizeof alphabet - 1)];
            else if (what == 1 && n > 8) memmove(text + at, text + at + 1, --n - at);
            else if (what == 2 && n < 200) memmove(text + at + 1, text + at, n++ - at);
        }
        spectrum s = { 0 };
        error e = { 0 };
        status st = spectrum_parse(text, n, "s.csv", &s, &e);
        int ok = st == ST_OK ? e.text[0] == '\0' && s.n >= 2 : st == ST_BAD_INPUT && e.text[0] && !s.R;
        for (size_t i = 0; st == ST_OK && i < s.n; i++)
            ok = ok && s.R[i] >= -0.02 && s.R[i] <= 1.05 && s.wavelength_nm[i] >= 100.0 &&
                 (i == 0 || s.wavelength_nm[i] > s.wavelength_nm[i - 1]);
        check_true(ok, e.text[0] ? e.text : "a wounded spectrum", __FILE__, __LINE__);
        good += st == ST_OK;
        bad += st != ST_OK;
        spectrum_free(&s);
    }
    CHECK(good > 500 && bad > 500); /* the mutations bite, but not always */
}

int main(void) {
    dialects();
    black();
    refusals();
    wounded();
    return check_done();
}
