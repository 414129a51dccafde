"""Which phrases name which kind of part, in the languages that schematics are written in. Read by checker.identify.word_kinds."""

from __future__ import annotations

# kind: phrases with one meaning, phrases that other parts carry too. Words in lower case; a plural s is dropped by the reader.
PHRASES: dict[str, tuple[str, str]] = {
    "optocoupler": (
        "optocoupler,opto coupler,optoisolator,opto isolator,optoiso,photocoupler,photo coupler,photoisolator,"
        "photo isolator,"
        "optokoppler,optocoupleur,optoacoplador,optically isolated,optical isolator",
        "opto",
    ),
    "digital-isolator": (
        "digital isolator,dgtl iso,dgtl isolator,digital iso,usb isolator,i2c isolator,can isolator,spi isolator,"
        "magnetic isolator,"
        "capacitive isolator,galvanic isolator,isolated transceiver,port isolator",
        "isolator",
    ),
    "isolated-amplifier": (
        "isolated amplifier,isolation amplifier,isolation amp,isolated amp,iso amp,isolated modulator,isolated adc",
        "",
    ),
    "isolated-driver": (
        "isolated gate driver,isolated driver,isolated gate drvr,isolation gate driver,isolated igbt driver",
        "",
    ),
    "isolated-module": (
        "isolated dc dc,isolated dcdc,isolated power module,isolated power supply,converter dcdc,isolated converter",
        "",
    ),
    "solid-state-relay": (
        "solid state relay,ssr,photorelay,photo relay,photomos,photomos relay,optomos,mosfet relay,relay solid state,"
        "relay solidstate,"
        "halbleiterrelais,solid state rly",
        "",
    ),
    "relay": ("relay,relais,relé,relè,rly,reed relay,relay general,relay spdt,relay dpdt,relay spst", ""),
    "current-transformer": (
        "current transformer,current xfmr,current sense transformer,current sensing transformer,stromwandler,transformer current",
        "",
    ),
    "gate-drive-transformer": (
        "gate drive transformer,gate driver transformer,gate transformer,xfmr gate drive,transformer gate drive,"
        "xfmr gate,gate drive xfmr,"
        "drive transformer,gate drive pulse transformer",
        "",
    ),
    "transformer": (
        "transformer,xfmr,xformer,trafo,netztrafo,printtrafo,ringkerntrafo,netztransformator,transformator,transfo,transformateur,übertrager,uebertrager,ubertrager,"
        "transformador,trasformatore,lan magnetic,"
        "ethernet magnetic",
        "",
    ),
    "hall-sensor": (
        "hall effect current sensor,hall current sensor,current sensor hall,sensor current hall,"
        "hall effect linear current sensor,"
        "isolated current sensor,current transducer,loop current sensor,sensor current,linear current sensor",
        "",
    ),
    "resistor": (
        "resistor,shunt resistor,current sense resistor,chip resistor,fusible resistor,widerstand,shuntwiderstand",
        "res,shunt,r",
    ),
    "network": (
        "resistor network,resistor array,r pack,r network,res array,res network,capacitor array,cap array,resistor pack",
        "",
    ),
    "potentiometer": (
        "potentiometer,trimpot,trimmer,r pot,r potentiometer,r trim,variable resistor,poti,trimmpoti,r variable,"
        "potenciômetro,potenciometro,potenciómetro,potentiomètre,potenziometro",
        "pot",
    ),
    "varistor": ("varistor,voltage dependent resistor,mov,vdr,metal oxide varistor,r varistor", ""),
    "thermistor": (
        "thermistor,ntc,temperature dependent resistor,icl,inrush current limiter,inrush limiter,heissleiter,kaltleiter,"
        "termistor,termistore,thermistance,"
        "ptc thermistor",
        "ptc",
    ),
    "capacitor": (
        "capacitor,cap cer,cap film,cap alum,cap tant,cap ceramic,cap poly,kondensator,elko,mlcc,condensateur,"
        "condensator,condensador,condensatore,supercapacitor,"
        "cap elec,cap electrolytic",
        "cap,c,cp,cpol,c polarized,supercap,electrolytic",
    ),
    "ferrite": ("ferrite bead,ferritebead,chip bead,ferrite chip,bead", "ferrite"),
    "common-mode-choke": (
        "common mode choke,common mode inductor,common mode filter,common mode transformer,commonmode,cmc,emi choke,"
        "emi filter common mode,"
        "common mode line filter,l commonmode,l common mode,stromkompensierte drossel,choke common mode,"
        "emifilter common mode,common mode,"
        "current compensated choke",
        "",
    ),
    "filter": ("line filter,emi filter,mains filter,netzfilter,power line filter,emifilter", ""),
    "inductor": (
        "inductor,fixed ind,ind fixed,choke,pfc choke,drossel,speicherdrossel,induktivität,power inductor,bobine,"
        "indutor,induttore,induttanza",
        "ind,l,coil,coupled inductor,l coupled,l core ferrite,l core iron,l ferrite core",
    ),
    "bridge": (
        "bridge rect,bridge rectifier,diode bridge,rectifier bridge,d bridge,brückengleichrichter,brueckengleichrichter,"
        "gleichrichter,"
        "full bridge rectifier,ponte retificadora,puente rectificador,ponte raddrizzatore,pont redresseur,pont de diode",
        "bridge",
    ),
    "zener": ("zener,zener diode,diode zener,diodo zener,d zener,z diode,zenerdiode", ""),
    "tvs": (
        "tvs,tvs diode,d tvs,transient voltage suppression,transient voltage suppressor,transient suppressor,transil,"
        "esd protection,"
        "esd suppressor,esd diode,suppressor diode,suppressordiode,esd protection diode",
        "esd",
    ),
    "led": ("led,light emitting diode,leuchtdiode,infrared emitter", ""),
    "diode": ("diode,diodo,schottky,rectifier diode,gleichrichterdiode,d schottky,fast recovery,rectifier,diac", "d"),
    "igbt": ("transistor igbt,igbt,insulated gate bipolar,q nigbt", ""),
    "jfet": ("jfet,q njfet,q pjfet", ""),
    "mosfet": ("transistor fet,mosfet,nmos,pmos,n channel mosfet,p channel mosfet,nmosfet,pmosfet,n mos,p mos", "fet"),
    "bipolar": (
        "transistor bjt,npn,pnp,bjt,bipolar transistor,trans npn,trans pnp,darlington,trans prebia,"
        "digital transistor,phototransistor",
        "transistor,trans",
    ),
    "triac": ("triac thyristor,triac,q triac,alternistor", ""),
    "thyristor": ("thyristor,scr,q scr,sidac", ""),
    "gas-tube": ("gdt,gas discharge tube,gas tube,gasableiter,gas arrestor,gas arrester,surge arrester", "arrester"),
    "spark-gap": ("spark gap,sparkgap,funkenstrecke", ""),
    "resettable-fuse": (
        "polyfuse,resettable fuse,ptc fuse,fuse resettable,ptc reset fuse,ptc resettable,fuse ptc,poly fuse,"
        "self resetting fuse,pptc,"
        "positive temperature coefficient fuse,polymeric positive temperature,rückstellsicherung,rueckstellsicherung,"
        "ptc sicherung,fusible réarmable",
        "",
    ),
    "fuse": ("fuse,fuseholder,fuse holder,sicherung,feinsicherung,fuse clip,fusible,fusível,fusivel,fusibile,sicherungshalter", ""),
    "switch": (
        "push button,pushbutton,switch,schalter,taster,tactile switch,tact switch,sw push,dip switch,slide switch,"
        "rocker switch,button,"
        "sw spst,sw spdt,sw dpst,sw dpdt,rotary encoder,incremental encoder,button switch",
        "sw",
    ),
    "jumper": ("solder jumper,solderjumper,jumper,solder bridge,lötbrücke", ""),
    "net-tie": ("net tie,nettie", ""),
    "crystal": ("crystal,xtal,quarz,quartz,resonator,oscillator,ceramic resonator,crystal oscillator,oszillator", ""),
    "battery": ("battery cell,battery holder,coin cell,batteriehalter,battery", ""),
    "motor": ("motor dc,stepper motor,servo motor", "motor"),
    "lamp": ("lamp,neon,bulb", ""),
    "buzzer": ("buzzer,speaker,beeper,loudspeaker,piezo,summer,lautsprecher", ""),
    "antenna": ("antenna,antenne", ""),
    "display": ("display,lcd,oled,7 segment,seven segment,e paper", ""),
    "sensor": (
        "temperature sensor,humidity sensor,pressure sensor,hall effect switch,hall switch,hall sensor,accelerometer,"
        "gyroscope,sens humi,sens temp,"
        "microphone,mikrofon,hall effect sensor,ir receiver,imu,magnetometer",
        "sensor,hall",
    ),
    "shunt-reference": (
        "shunt regulator,shunt reference,vref shunt,shunt voltage reference,adjustable shunt,precision shunt,programmable shunt",
        "",
    ),
    "regulator": (
        "voltage regulator,linear regulator,ldo,low dropout,reg linear,reg buck,reg boost,buck converter,"
        "boost converter,step down,step up,"
        "dropout regulator,regulator linear,regulator switching,spannungsregler,charge pump,reg ldo,switching regulator,"
        "buck boost,"
        "step down regulator,dc dc regulator",
        "regulator,buck,boost",
    ),
    "controller": (
        "pwm controller,pwm ctrlr,ctrlr pwm,pfc controller,pfc ctrlr,flyback controller,resonant controller,llc controller,"
        "synchronous rectifier,sync rect,powered device,poe pd,reg ctrlr,switching controller,smps controller,"
        "led driver,ctrlr",
        "controller",
    ),
    "module": (
        "arduino nano,arduino uno,arduino mega,arduino pro mini,d1 mini,nodemcu,raspberry pi pico,"
        "rf module,wifi module,bluetooth module,radio module,dc dc converter,dcdc converter,dc to dc converter,dcdc,dc dc wandler",
        "module",
    ),
    "ic": (
        "microcontroller,mcu,opamp,op amp,operational amplifier,comparator,transceiver,efuse,e fuse,voltage detector,"
        "logic gate,"
        "level translator,shift register,transformer driver,relay driver,eeprom,flash memory,voltage reference,"
        "motor driver,gate driver,"
        "gate drvr,half bridge driver,load switch,high side switch,power switch,analog switch,battery charger,"
        "battery monitor,"
        "battery management,audio amplifier,usb serial,real time clock,line driver,darlington array,transistor array,"
        "darlington transistor array,"
        "isolator switch,battery isolator,ground loop isolator,led matrix driver,half bridge,h bridge,full bridge,"
        "current sense amplifier,"
        "serial flash,fuel gauge,bus switch,timer,crystal driver,power distribution switch,display driver,lcd driver,"
        "usb hub,usb bridge,"
        "temperature monitor,supervisor,driver fet,driver motor,driver led,driver display,driver relay,lamp driver,"
        "fet driver,mosfet driver,igbt driver",
        "ic,amplifier,driver",
    ),
    "inlet": (
        "iec 60320,iec60320,iec320,iec 320,iec c14,iec c8,iec c6,ac inlet,mains inlet,power inlet,appliance inlet,"
        "appliance coupler,"
        "power entry,power entry module,kaltgerätestecker,kaltgeraetestecker,conn inlet,inlet,wall plug,wallplug,"
        "mains plug,netzbuchse",
        "",
    ),
    "connector": (
        "connector,conn,header,hdr,pinheader,pin header,pin socket,pinsocket,screw terminal,screwterminal,terminal block,"
        "term block,terminalblock,"
        "barrel jack,barreljack,jack,jack dc,receptacle,anreihklemme,klemme,anschlussklemme,bornier,phoenix contact,"
        "usb micro,usb mini,"
        "usb a,usb b,usb c,usb type c,hdmi,rj45,rj11,d sub,dsub,headerpin,header pin,idc,fpc,ffc,card socket,micro sd,"
        "microsd,sd card,"
        "ic socket,edge connector,pogo pin,stiftleiste,buchsenleiste,steckverbinder,terminal strip,relay socket,stecker,"
        "buchse,solder pad,"
        "wire pad,conn 01x,uext,sim card,bnc,sma connector,banana,spade,faston",
        "plug,socket,terminal,usb",
    ),
    "test-point": ("test point,testpoint,test pad,testpad,tp", ""),
    "hole": ("mounting hole,mountinghole,mounting pad,befestigungsloch,standoff,mounting hole pad", "hole"),
    "fiducial": ("fiducial,passermarke,fid", ""),
    "logo": ("logo,silkscreen logo,on silkscreen,graphic", ""),
    "heatsink": ("heatsink,heat sink,kühlkörper,kuehlkoerper,heat spreader", ""),
    "shield": ("rf shield,shield can,shielding can,emi shield,shield cabinet,shielding cabinet", ""),
}
WITH_ATTRIBUTES: tuple[tuple[str, str, dict[str, str]], ...] = (
    # kind, phrases, attributes the phrase brings
    (
        "optocoupler",
        "opto triac,optotriac,phototriac,photo triac,triac optocoupler,triac output optocoupler,optoiso triac,"
        "optocoupler triac,"
        "triac output optoisolator,triac driver optocoupler,triac optoisolator,triac driver output",
        {"output": "triac"},
    ),
    (
        "isolated-module",
        "ac dc module,acdc module,ac dc power module,converter acdc,ac dc converter module,encapsulated power supply,"
        "ac dc power supply,ac dc wandler,netzteilmodul,"
        "ac dc encapsulated,ac dc supply",
        {"acdc": "yes"},
    ),
    (
        "controller",
        "offline switcher,off line switcher,offline switch,off line switch,offline converter,off line converter,"
        "offline flyback,flyback switcher,"
        "offline controller,off line controller,offline regulator,offline,primary side regulated,"
        "primary side regulation,pfc ctrlr,"
        "pfc controller,power factor controller,power factor correction controller",
        {"offline": "yes"},
    ),
    (
        "connector",
        "magjack,mag jack,rj45 magnetic,conn magjack,jack magnetic,integrated magnetic,rj45 magjack,rj45 transformer,"
        "rj45 with magnetic",
        {"magnetics": "yes"},
    ),
)
