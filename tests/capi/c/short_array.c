/* Hands over an array of one number as one of two: what an instrument has to see. */
#include "hence.h"

#include <stdlib.h>

int main(void) {
  hence_basis *basis = NULL;
  double factors[2];
  double *offset = calloc(1, sizeof *offset);
  if (hence_basis_parse("3.5%", &basis, NULL) != HENCE_OK) return 0;
  hence_factors(basis, offset, 2, factors, NULL);
  return 0;
}
