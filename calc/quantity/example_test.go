package quantity_test

import (
	"fmt"

	"floatrail/calc/quantity"
)

func ExampleParse() {
	charge, _, _ := quantity.Parse("63 nC", quantity.Charge)
	fmt.Println(charge)
	resistance, reading, _ := quantity.Parse("4k7", quantity.Resistance)
	fmt.Println(resistance, reading.Meaning)
	_, _, err := quantity.Parse("0", quantity.Voltage)
	fmt.Println(err)
	// Output:
	// 6.3e-08
	// 4700 4.7 kΩ
	// read "0", expected voltage (V with an SI prefix, such as 18 V or 350 mV): zero carries its unit too; write 0 V
}

func ExampleParseTyp() {
	c, _, _ := quantity.ParseTyp("220 nF ±10 %", quantity.Capacitance)
	fmt.Println(quantity.Format(c.Low, quantity.Capacitance), quantity.Format(c.High, quantity.Capacitance))
	// Output: 198 nF 242 nF
}

func ExampleParseMarking() {
	m, _ := quantity.ParseMarking("564K/50V/X7R/0805")
	for _, r := range m.Readings {
		fmt.Printf("%s: %s\n", r.Text, r.Meaning)
	}
	// Output:
	// 564: 560 nF
	// K: ±10 %
	// 50V: rated voltage 50 V
	// X7R: dielectric X7R
	// 0805: case size 0805
}
