package property
import ("testing";"context";"floatrail/calc";"floatrail/calc/finding";"time";"strings")
func TestZZ(t *testing.T){
 for _, name := range []string{"buck48","gan650","drive400"} {
 tree := document(t, name)
 for _, sim := range []bool{false,true} {
 r := bind(t, tree)
 r.Options.Simulate=sim
 
 t0:=time.Now()
 rep,_ := calc.Review(context.Background(), *r, calc.WithDutyLimits|calc.WithTransient)
 t.Log(name, sim, time.Since(t0))
 for _,f := range rep.Findings { 
   if strings.HasPrefix(f.Rule,"node/")||strings.HasPrefix(f.Rule,"gate/")||f.Rule=="diode/reverse-voltage" { if f.Outcome!=finding.NotApplicable {t.Log(f.Rule, f.Outcome, f.Message, f.Notes, f.BreakEven)}}
 }}}
}
