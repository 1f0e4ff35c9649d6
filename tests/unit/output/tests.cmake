ce_unit_test(output number text)
