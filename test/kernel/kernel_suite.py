"""The protocol suite of Debian's python3-jupyter-kernel-test, with the samples of this kernel. Run by suite.test.ts."""
import unittest

import jupyter_kernel_test

rows = 'data\n  operator glove seconds\n  1 bare 40.1\n  2 bare 38.7\n  3 knit 45.2\n  4 knit 47.0'
family = (
    'response seconds in "s"\nsubjects operator\nfactor glove between operators: bare, knit, wool\n'
    "family primary: all pairs of glove\n  hold error 5% by holm\ndraw passing\nshow settings"
)


class MeanwiseKernel(jupyter_kernel_test.KernelTests):
    kernel_name = "meanwise"
    language_name = "meanwise"
    file_extension = ".mwise"

    code_hello_world = 'study "hello, world"'
    # Without a notebook's name the kernel says on stderr where its record goes, once something is recorded.
    code_stderr = rows
    completion_samples = [
        {"text": "omni", "matches": {"omnibus"}},
        {"text": "compare primary bes", "matches": {"beside other methods"}},
    ]
    complete_code_samples = ["check", "show settings", 'read "x.csv"']
    incomplete_code_samples = ["family primary: each glove against", "data"]
    invalid_code_samples = ["chek", "factor glove whithin operator: a, b"]
    code_generate_error = "compare nothing"
    code_execute_result = [
        {"code": "show settings", "mime": "text/html"},
        {"code": "help holm", "mime": "text/markdown"},
    ]
    code_display_data = [
        {"code": family, "mime": "image/svg+xml"},
        {"code": family, "mime": "image/png"},
    ]
    code_history_pattern = "show*"
    supported_history_operations = ("tail", "range", "search")
    code_inspect_sample = "compare"
    code_clear_output = ""


if __name__ == "__main__":
    unittest.main(verbosity=2)
