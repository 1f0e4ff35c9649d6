ce_unit_test(fit flory_fox)
