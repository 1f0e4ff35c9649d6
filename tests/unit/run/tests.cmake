ce_unit_test(run read corpus hostile segments)
target_link_options(test_run_hostile PRIVATE
  LINKER:--wrap=malloc LINKER:--wrap=calloc LINKER:--wrap=realloc LINKER:--wrap=reallocarray)
