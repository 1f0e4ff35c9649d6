ce_unit_test(run read)
