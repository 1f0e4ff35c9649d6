ce_unit_test(text number table header load)
