/* The checks of every test: a failed one prints file, line, what was got and wanted, and goes on.
 * A test's main ends with `return check_done();`. */
#ifndef SWARD_TESTS_CHECK_H
#define SWARD_TESTS_CHECK_H
#include <math.h>
#include <stdio.h>
#include <string.h>

static int check_failed, check_count;

static inline void check_true(int ok, const char *text, const char *file, int line) {
    check_count++;
    if (ok) return;
    check_failed++;
    printf("%s:%d: failed: %s\n", file, line, text);
}
static inline void check_near(double got, double want, double tol, const char *what, const char *source,
                              const char *file, int line) {
    check_count++;
    if (fabs(got - want) <= tol) return; /* a NaN fails */
    check_failed++;
    printf("%s:%d: failed: %s: got %.12g, wanted %.12g +- %.3g%s%s\n", file, line, what, got, want, tol,
           source[0] ? "; source: " : "", source);
}
static inline int check_done(void) {
    printf("%d passed, %d failed\n", check_count - check_failed, check_failed);
    return check_failed || !check_count;
}
/* CHECK(condition)                          holds
 * CHECK_NEAR(got, want, tol)                absolute tolerance
 * CHECK_SOURCE(got, want, tol, source)      the same against a figure published elsewhere
 * CHECK_FAILS(call, code, err, words)       call returns status `code` and err.text holds `words` */
#define CHECK(c) check_true(!!(c), #c, __FILE__, __LINE__)
#define CHECK_NEAR(g, w, t) check_near((g), (w), (t), #g, "", __FILE__, __LINE__)
#define CHECK_SOURCE(g, w, t, s) check_near((g), (w), (t), #g, (s), __FILE__, __LINE__)
#define CHECK_FAILS(call, want, err, words)                                                                  \
    do {                                                                                                     \
        (err) = (error){ ST_OK, "" };                                                                        \
        check_true((call) == (want) && strstr((err).text, (words)) != NULL, #call " fails with '" words "'", \
                   __FILE__, __LINE__);                                                                      \
    } while (0)
#endif
