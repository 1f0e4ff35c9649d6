ce_unit_test(base error quantity order)
