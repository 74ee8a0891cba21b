//! soups
