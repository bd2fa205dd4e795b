/* self_test.h: does the linear algebra of this machine add up? */
#ifndef CORESOAK_SELF_TEST_H
#define CORESOAK_SELF_TEST_H

#include <stdbool.h>
#include <stddef.h>

/* Solves three reference systems (tridiagonal, band Cholesky, band with pivoting) whose solutions
   are known, and looks at the solution and the residual. True if all are right; else the reason in
   message. */
bool self_test(char *message, size_t size);

/* One thread for each call of the linear algebra, whatever the environment says. Before any thread
 * starts. */
void arithmetic_in_one_thread(void);

/* Name of the processor kernel that the linear algebra chose, "unknown" if it does not tell. */
const char *arithmetic_kernel(void);

#endif
