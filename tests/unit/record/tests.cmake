ce_unit_test(record record)
