package stage

import "reflect"

// Clone copies a stage deeply, for trials with other parts.
func (s *Stage) Clone() *Stage {
	out := *s
	out.inputs = nil
	detach(reflect.ValueOf(&out).Elem())
	return &out
}

// detach replaces slices and pointers by copies. What a Quantity refers to is not changed by Complete and stays shared.
func detach(v reflect.Value) {
	switch v.Kind() {
	case reflect.Pointer:
		if v.IsNil() || !v.CanSet() {
			return
		}
		c := reflect.New(v.Type().Elem())
		c.Elem().Set(v.Elem())
		v.Set(c)
		detach(c.Elem())
	case reflect.Slice:
		if v.IsNil() || !v.CanSet() {
			return
		}
		c := reflect.MakeSlice(v.Type(), v.Len(), v.Len())
		reflect.Copy(c, v)
		v.Set(c)
		for i := range c.Len() {
			detach(c.Index(i))
		}
	case reflect.Struct:
		if v.Type() == quantityType {
			return
		}
		for i := range v.NumField() {
			if f := v.Field(i); f.CanSet() {
				detach(f)
			}
		}
	}
}
