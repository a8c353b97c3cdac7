package report

import (
	"reflect"
	"strings"

	"beadwell/calib"
)

// withLists returns a copy of the result in which no list is nil, so that a
// key that is always there holds a list and never null. Optional keys stay
// absent when they are empty.
func withLists(r *calib.Result) *calib.Result {
	filled := filledCopy(reflect.ValueOf(*r), false)
	result := filled.Interface().(calib.Result)
	return &result
}

// filledCopy copies a value with everything below it.
func filledCopy(v reflect.Value, optional bool) reflect.Value {
	switch v.Kind() {
	case reflect.Struct:
		c := reflect.New(v.Type()).Elem()
		for i := range v.NumField() {
			omitted := strings.Contains(v.Type().Field(i).Tag.Get("json"), ",omitempty")
			c.Field(i).Set(filledCopy(v.Field(i), omitted))
		}
		return c
	case reflect.Slice:
		if v.IsNil() && optional {
			return v
		}
		c := reflect.MakeSlice(v.Type(), v.Len(), v.Len())
		if flat(v.Type().Elem()) {
			reflect.Copy(c, v)
			return c
		}
		for i := range v.Len() {
			c.Index(i).Set(filledCopy(v.Index(i), false))
		}
		return c
	}
	return v // numbers, words, and optional parts that hold no list
}

// flat tells whether values of the type hold no list.
func flat(t reflect.Type) bool {
	switch t.Kind() {
	case reflect.Slice, reflect.Map, reflect.Pointer:
		return false
	case reflect.Array:
		return flat(t.Elem())
	case reflect.Struct:
		for i := range t.NumField() {
			if !flat(t.Field(i).Type) {
				return false
			}
		}
	}
	return true
}
