package main
import ("os";"fmt";"time";"bytes";"wavetally/report/internal/fixture";"wavetally/report";"wavetally/report/pdf")
func main(){
 for n,f:=range map[string]func()*report.Survey{"week":fixture.Week,"short":fixture.Short,"tiny":fixture.Tiny}{
  s:=f(); t:=time.Now(); var b bytes.Buffer
  err:=pdf.Write(&b,s,pdf.Options{}); fmt.Println(n,err,time.Since(t),b.Len())
  os.WriteFile("/tmp/look/"+n+".pdf",b.Bytes(),0o644)
 }
}
