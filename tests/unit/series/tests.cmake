ce_unit_test(series read)
