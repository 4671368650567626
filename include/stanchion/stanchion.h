/* The C face of the library: the questions of the command line with opaque handles and error strings.
 *
 *   stanchion_request* request = stanchion_request_new();
 *   stanchion_set_stiffness(request, "K.mtx");
 *   stanchion_answer* answer = stanchion_check(request);
 *   if (stanchion_status(answer) != STANCHION_OK) puts(stanchion_message(answer));
 *   else printf("%d negative\n", (int)stanchion_negative(answer));
 *   stanchion_answer_free(answer);
 *   stanchion_request_free(request);
 *
 * Nothing prints or exits. Handles may be used by one thread at a time; different handles side by side.
 * Strings that are given are copied; strings that are returned live as long as their handle. Every function
 * accepts a null handle: setters and free then do nothing, questions answer with STANCHION_BAD_USAGE. */
#ifndef STANCHION_STANCHION_H
#define STANCHION_STANCHION_H

#include <stddef.h>
#include <stdint.h>

#ifdef __cplusplus
extern "C" {
#endif

typedef struct stanchion_request stanchion_request;
typedef struct stanchion_answer stanchion_answer;

/* The numbers are the exit codes of the program. */
enum {
  STANCHION_OK = 0, /* an answer is there, be it good or not */
  STANCHION_BAD_USAGE = 2,
  STANCHION_RESOURCE_LIMIT = 4,
  STANCHION_INTERNAL = 5,
  STANCHION_INTERRUPTED = 130
};

enum {
  STANCHION_POSITIVE_DEFINITE = 0,
  STANCHION_POSITIVE_SEMIDEFINITE,
  STANCHION_NEGATIVE_SEMIDEFINITE,
  STANCHION_NEGATIVE_DEFINITE,
  STANCHION_INDEFINITE,
  STANCHION_UNRESOLVED
};

enum { STANCHION_LEVEL_NONE = 0, STANCHION_LEVEL_STATISTICAL, STANCHION_LEVEL_PROVED };

/* Null when there is no memory. */
stanchion_request* stanchion_request_new(void);
void stanchion_request_free(stanchion_request* request);

/* Files, in any format the program reads. At most one of geometric (K + f G) and mass (K - s M). */
void stanchion_set_stiffness(stanchion_request* request, const char* path);
void stanchion_set_geometric(stanchion_request* request, const char* path);
void stanchion_set_mass(stanchion_request* request, const char* path);
void stanchion_add_matrix(stanchion_request* request, const char* path, double factor);
void stanchion_set_dofs(stanchion_request* request, const char* path);
void stanchion_set_fix(stanchion_request* request, const char* path);
void stanchion_set_multipliers(stanchion_request* request, const char* path);

void stanchion_add_shift(stanchion_request* request, double shift);
void stanchion_set_threads(stanchion_request* request, int threads); /* 0: all available */
void stanchion_set_memory_cap(stanchion_request* request, int64_t bytes);
void stanchion_set_resolution(stanchion_request* request, double resolution);
void stanchion_set_digits(stanchion_request* request, int digits);
/* Called with the stage and the fraction done; returning 0 stops the run. Null: no calls. */
void stanchion_set_progress(stanchion_request* request,
                            int (*progress)(const char* stage, double fraction, void* user), void* user);

/* The questions. Null only when there is no memory for the handle itself. */
stanchion_answer* stanchion_check(const stanchion_request* request);
stanchion_answer* stanchion_count(const stanchion_request* request);
stanchion_answer* stanchion_forecast(const stanchion_request* request);
void stanchion_answer_free(stanchion_answer* answer);

/* STANCHION_OK, or why there is no answer; then message, code, place and remedy say it in words (""
 * otherwise). */
int stanchion_status(const stanchion_answer* answer);
const char* stanchion_message(const stanchion_answer* answer);
const char* stanchion_code(const stanchion_answer* answer);
const char* stanchion_place(const stanchion_answer* answer);
const char* stanchion_remedy(const stanchion_answer* answer);

/* After stanchion_check; STANCHION_UNRESOLVED and -1 otherwise. Zero: at the resolution, of either sign. */
int stanchion_verdict(const stanchion_answer* answer);
int stanchion_level(const stanchion_answer* answer);
int32_t stanchion_negative(const stanchion_answer* answer);
int32_t stanchion_zero(const stanchion_answer* answer);
int32_t stanchion_positive(const stanchion_answer* answer);
int32_t stanchion_undecided(const stanchion_answer* answer);

/* After stanchion_count: how many shifts, and for shift number `index` (from 0) the least and the most that
 * can lie below it, equal when the count is certified. stanchion_count_at gives 0 when `index` is out of
 * range, else 1; the pointers may be null. */
size_t stanchion_counts(const stanchion_answer* answer);
int stanchion_count_at(const stanchion_answer* answer, size_t index, double* shift, int32_t* least,
                       int32_t* most, int* level);

/* The whole answer as the program prints it, and as JSON; "" when there is none. */
const char* stanchion_text(const stanchion_answer* answer);
const char* stanchion_json(const stanchion_answer* answer);

const char* stanchion_version(void);

#ifdef __cplusplus
}
#endif

#endif
