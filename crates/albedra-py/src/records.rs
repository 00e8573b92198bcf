//! Results that are a few named fields: read-only, compared by value, pickled by their fields.

use pyo3::prelude::*;

use crate::text::{number, quoted, tuple};

/// A field that can be written into a representation.
pub(crate) trait Written {
    /// How it looks there.
    fn written(&self, py: Python<'_>) -> PyResult<String>;
}

impl Written for f64 {
    fn written(&self, _: Python<'_>) -> PyResult<String> {
        Ok(number(*self))
    }
}

impl Written for bool {
    fn written(&self, _: Python<'_>) -> PyResult<String> {
        Ok(if *self { "True" } else { "False" }.to_owned())
    }
}

impl Written for String {
    fn written(&self, py: Python<'_>) -> PyResult<String> {
        quoted(py, self)
    }
}

impl Written for (f64, f64) {
    fn written(&self, _: Python<'_>) -> PyResult<String> {
        Ok(tuple(&[self.0, self.1]))
    }
}

impl<T: Written> Written for Option<T> {
    fn written(&self, py: Python<'_>) -> PyResult<String> {
        self.as_ref()
            .map_or_else(|| Ok("None".to_owned()), |value| value.written(py))
    }
}

macro_rules! written_by_display {
    ($($t:ty),+) => {
        $(impl Written for $t {
            fn written(&self, _: Python<'_>) -> PyResult<String> {
                Ok(self.to_string())
            }
        })+
    };
}

written_by_display!(u64, usize, i128);

/// A record that can be printed in full.
pub(crate) trait Columns {
    /// Its fields and their values, one a line.
    fn columns(&self, py: Python<'_>) -> PyResult<String>;
}

/// Makes a class of named fields, with further methods if there are any.
macro_rules! record {
    (
        $(#[doc = $doc:literal])*
        $name:ident { $($(#[doc = $field_doc:literal])* $field:ident: $t:ty,)+ }
        $($methods:item)*
    ) => {
        $(#[doc = $doc])*
        #[pyclass(frozen, eq, from_py_object, module = "albedra")]
        #[derive(Clone, PartialEq)]
        pub(crate) struct $name {
            $(pub(crate) $field: $t,)+
        }

        #[pymethods]
        impl $name {
            $(
                $(#[doc = $field_doc])*
                #[getter]
                fn $field(&self) -> $t {
                    self.$field.clone()
                }
            )+

            #[staticmethod]
            #[allow(clippy::too_many_arguments, reason = "one for each field")]
            fn _rebuild($($field: $t),+) -> Self {
                Self { $($field),+ }
            }

            fn __reduce__<'py>(&self, py: Python<'py>) -> PyResult<Bound<'py, PyAny>> {
                let rebuild = py.get_type::<Self>().getattr("_rebuild")?;
                let fields = pyo3::types::PyTuple::new(
                    py,
                    [$(self.$field.clone().into_pyobject(py)?.to_owned().into_any()),+],
                )?;
                Ok((rebuild, fields).into_pyobject(py)?.into_any())
            }

            fn __repr__(&self, py: Python<'_>) -> PyResult<String> {
                let fields = [
                    $(format!("{}={}", stringify!($field), $crate::records::Written::written(&self.$field, py)?)),+
                ];
                let full = format!("<{}: {}>", stringify!($name), fields.join(", "));
                Ok($crate::text::fitting(full.clone(), || full))
            }

            $($methods)*
        }

        impl $crate::records::Columns for $name {
            fn columns(&self, py: Python<'_>) -> PyResult<String> {
                Ok($crate::text::lines(&[
                    $((stringify!($field), $crate::records::Written::written(&self.$field, py)?)),+
                ]))
            }
        }
    };
}

pub(crate) use record;
