ce_unit_test(fit flory_fox nls eiv relation stats robust refuse fit)
