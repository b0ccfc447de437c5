/* Prints every macro, size and offset of the header, as this compiler sees them. */
#include "hence.h"

#include <stdio.h>

#define MACRO(name) printf("%s %lld\n", #name, (long long)(name))
#define SIZE(type) printf("sizeof %s %zu %zu\n", #type, sizeof(type), _Alignof(type))
#define FIELD(type, field) printf("offset %s.%s %zu\n", #type, #field, offsetof(type, field))

int main(void) {
  MACRO(HENCE_ABI_VERSION);
  MACRO(HENCE_LENGTH_MAX);
  MACRO(HENCE_OK);
  MACRO(HENCE_ERR_NULL);
  MACRO(HENCE_ERR_ALIGNMENT);
  MACRO(HENCE_ERR_LENGTH);
  MACRO(HENCE_ERR_OVERLAP);
  MACRO(HENCE_ERR_CAPACITY);
  MACRO(HENCE_ERR_UTF8);
  MACRO(HENCE_ERR_NOT_FINITE);
  MACRO(HENCE_ERR_RANGE);
  MACRO(HENCE_ERR_DOMAIN);
  MACRO(HENCE_ERR_SHAPE);
  MACRO(HENCE_ERR_NO_MEANING);
  MACRO(HENCE_ERR_SYNTAX);
  MACRO(HENCE_ERR_SCHEDULE);
  MACRO(HENCE_ERR_CONTEXT);
  MACRO(HENCE_ERR_UNSUPPORTED);
  MACRO(HENCE_ERR_INTERNAL);
  MACRO(HENCE_CELL_NUMBER);
  MACRO(HENCE_CELL_TEXT);
  MACRO(HENCE_CELL_BLANK);
  MACRO(HENCE_CELL_LOGICAL);
  MACRO(HENCE_CELL_ERROR);
  MACRO(HENCE_COMPOUNDING_YEARLY);
  MACRO(HENCE_COMPOUNDING_CONTINUOUS);
  MACRO(HENCE_PARAMETER_RATE);
  MACRO(HENCE_PARAMETER_PREFERENCE);
  MACRO(HENCE_PARAMETER_ELASTICITY);
  MACRO(HENCE_PARAMETER_GROWTH);
  SIZE(hence_error);
  FIELD(hence_error, struct_size);
  FIELD(hence_error, code);
  FIELD(hence_error, argument);
  FIELD(hence_error, index);
  FIELD(hence_error, message);
  SIZE(hence_range);
  FIELD(hence_range, struct_size);
  FIELD(hence_range, rows);
  FIELD(hence_range, columns);
  FIELD(hence_range, numbers);
  FIELD(hence_range, kinds);
  FIELD(hence_range, texts);
  SIZE(hence_growth);
  FIELD(hence_growth, struct_size);
  FIELD(hence_growth, has_persistence);
  FIELD(hence_growth, trend);
  FIELD(hence_growth, trend_error);
  FIELD(hence_growth, mean);
  FIELD(hence_growth, mean_error);
  FIELD(hence_growth, trend_growth);
  FIELD(hence_growth, mean_growth);
  FIELD(hence_growth, sd);
  FIELD(hence_growth, sd_error);
  FIELD(hence_growth, persistence);
  FIELD(hence_growth, persistence_error);
  SIZE(hence_spread);
  FIELD(hence_spread, struct_size);
  FIELD(hence_spread, mean);
  FIELD(hence_spread, mean_error);
  FIELD(hence_spread, sd);
  FIELD(hence_spread, lowest);
  FIELD(hence_spread, highest);
  FIELD(hence_spread, positive);
  FIELD(hence_spread, positive_error);
  printf("abi %u\n", (unsigned)hence_abi_version());
  return 0;
}
