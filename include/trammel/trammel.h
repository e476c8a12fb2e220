/* trammel.h: the public interface of libtrammel.
 *
 * From lower and upper limits on interatomic distances to an ensemble of 3D models, and to a proof where limits contradict
 * each other. Objects are opaque; each has one _free that takes NULL. The library never prints, never exits and has no
 * global state of its own: different objects can be used from different threads. Lengths are in Å, angles in degrees.
 */
#ifndef TRAMMEL_H
#define TRAMMEL_H

#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>

#ifdef __cplusplus
extern "C" {
#endif

#define TML_VERSION "0.1.0"

typedef enum tml_status {
    TML_OK = 0,
    TML_CONTRADICTED, /* limits that cannot hold together; not an error of the call */
    TML_SHORT,        /* the work ended with fewer passing models than asked for */
    TML_BAD_INPUT,    /* a file or an argument is wrong; tml_error says where */
    TML_TOO_LARGE,    /* more memory than the machine or the format has */
    TML_NO_MEMORY,
    TML_IO,           /* reading or writing failed: disk, permission, pipe */
    TML_INTERRUPTED   /* the caller's stop flag was set */
} tml_status;

/* What went wrong, and where. The caller owns it, zeroed before first use; file is "" and line 0 where there is none. */
typedef struct tml_error {
    tml_status status;
    char file[256];
    long line, column;
    char message[1024];
} tml_error;

typedef struct tml_problem tml_problem;   /* molecule and restraints: what the inputs say */
typedef struct tml_bounds tml_bounds;     /* lower and upper limits of all pairs */
typedef struct tml_ensemble tml_ensemble; /* models and what was measured on them */

/* Progress: stage is a short word, done of total; called from one thread at a time. */
typedef void tml_progress_fn(void *context, const char *stage, long done, long total);

/* How long work meets its caller: both may be NULL. *stop, once nonzero, ends the work with TML_INTERRUPTED. */
typedef struct tml_watch {
    tml_progress_fn *progress;
    void *context;
    const volatile int *stop;
} tml_watch;

const char *tml_version(void);

#ifdef __cplusplus
}
#endif
#endif
