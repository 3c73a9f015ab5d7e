//! Values from outside the project, the source named beside each check.

mod halfspace;
